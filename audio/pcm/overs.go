package pcm

import (
	"fmt"
	"math"
)

// place is a sample of a stream.
type place struct {
	set     bool
	frame   int64
	channel int
}

// at is the place of the i-th sample of the block in hand.
func (q *Quantiser) at(i int) place {
	return place{true, q.frame + int64(i/q.channels), i % q.channels}
}

// roundLoud rounds the i-th sample of a block, x, that is near full scale or
// beyond, or no number at all.
func (q *Quantiser) roundLoud(i int, x, noise float64) int32 {
	y := x * q.scale
	if y-y != 0 {
		q.refuse(i, x)
		return 0
	}
	q.headroom = max(q.headroom, math.Abs(y)/q.most(i, y < 0))
	code := math.RoundToEven(y + noise)
	fit := min(max(code, -q.scale), q.scale-1)
	if code != fit {
		if q.overs == 0 {
			q.overAt = q.at(i)
		}
		q.overs++
		q.overPeak = max(q.overPeak, math.Abs(y)/q.scale)
	}
	return int32(fit)
}

// most is the largest magnitude, in LSB, that fits the channel of the i-th sample
// on one side of 0, whatever its dither.
func (q *Quantiser) most(i int, negative bool) float64 {
	most := q.scale - 1
	if negative {
		most++ // there is one more code below 0 than above
	}
	if q.dithered && q.dither[i%q.channels] != nil {
		most -= ditherPeak
	}
	return most
}

// refuse notes the first sample that cannot be encoded at all.
func (q *Quantiser) refuse(i int, value float64) {
	if !q.nonFinite.set {
		q.nonFinite, q.badValue = q.at(i), value
	}
}

func (q *Quantiser) nonFiniteError() error {
	at := fmt.Sprintf("frame %d, channel %d", q.nonFinite.frame, q.nonFinite.channel+1)
	if q.badValue-q.badValue != 0 {
		return fmt.Errorf("%s: the sample is %v, which no format can hold; check the chain and the input for values beyond all bounds", at, q.badValue)
	}
	return fmt.Errorf("%s: the sample is %g times full scale, too much for %v; check the gains of the chain, or use float64", at, q.badValue, q.encoding)
}

// Overs is the number of samples so far whose code was beyond the range.
func (q *Quantiser) Overs() int64 { return q.overs }

// OverPeak is the largest magnitude, before dither, among the overs; 0 if none.
func (q *Quantiser) OverPeak() float64 { return q.overPeak }

// FirstOver is the place of the first over, both counted from 0; -1, -1 if none.
func (q *Quantiser) FirstOver() (frame int64, channel int) {
	if !q.overAt.set {
		return -1, -1
	}
	return q.overAt.frame, q.overAt.channel
}

// HeadroomDB is the attenuation in dB, not rounded, after which the same stream
// has no overs; 0 if it has none as it is. It brings the loudest sample to the
// last code on its side of 0, or, in a channel with dither, one LSB short of
// it, so that dither of any value fits. The half LSB that rounding would still
// forgive is left as allowance for the arithmetic of the gain.
func (q *Quantiser) HeadroomDB() float64 {
	if q.overs == 0 {
		return 0
	}
	return 20 * math.Log10(q.headroom)
}
