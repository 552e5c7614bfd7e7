package pcm

import (
	"fmt"
	"math"
)

// blockSamples is how many samples are rounded before they are packed: few
// enough that the codes stay in the first-level cache.
const blockSamples = 2048

// Quantiser turns interleaved float64 samples into bytes, remembers where a
// stream stands, and counts what does not fit. Not for concurrent use.
type Quantiser struct {
	encoding Encoding
	channels int
	dither   []*Dither // one a channel, or none at all
	codes    []int32
	frame    int64 // frames encoded so far

	overs     int64
	overPeak  float64
	overAt    place
	headroom  float64 // largest ratio of a sample to what its channel can hold
	nonFinite place
	badValue  float64
}

// place is a sample of a stream; order is by frame, then channel.
type place struct {
	set     bool
	frame   int64
	channel int
}

// first keeps the earlier of two places and tells whether that is the new one.
func (p *place) first(frame int64, channel int) bool {
	if p.set && (p.frame < frame || p.frame == frame && p.channel < channel) {
		return false
	}
	*p = place{true, frame, channel}
	return true
}

// NewQuantiser makes a quantiser for one stream. dither is nil for none, or has
// an entry a channel, each of which may be nil; float encodings take none.
func NewQuantiser(e Encoding, channels int, dither []*Dither) (*Quantiser, error) {
	if err := e.Check(); err != nil {
		return nil, err
	}
	if channels < 1 {
		return nil, fmt.Errorf("%d channels cannot be encoded, at least 1 is needed", channels)
	}
	if dither != nil && len(dither) != channels {
		return nil, fmt.Errorf("dither for %d channels does not fit %d", len(dither), channels)
	}
	for _, d := range dither {
		if d != nil && e.Float {
			return nil, fmt.Errorf("%v takes no dither; dither only PCM", e)
		}
	}
	frames := max(1, blockSamples/channels)
	return &Quantiser{encoding: e, channels: channels, dither: dither, codes: make([]int32, frames*channels)}, nil
}

// Encode converts len(src)/channels whole frames and appends them to the
// stream that came before; any split of a stream gives the same bytes.
//
// PCM: the value is scaled to codes, dither is added where the channel has it,
// and the sum is rounded, halves to even. A code beyond the range is an over:
// it is written as the nearest code, counted and remembered (see
// [Quantiser.Overs], [Quantiser.FirstOver]), so that the caller can refuse the
// result. Float: the value is stored; 32 bits are rounded to nearest.
//
// It fails at NaN and infinities, and at values beyond the range of 32-bit
// float; the error names the first such sample, with channels counted from 1.
// After an error the contents of dst mean nothing. It panics unless
// len(src) is a multiple of the channels and len(dst) = len(src)*e.Bytes.
func (q *Quantiser) Encode(dst []byte, src []float64) error {
	if len(src)%q.channels != 0 || len(dst) != len(src)*q.encoding.Bytes {
		panic(fmt.Sprintf("pcm: %d bytes for %d samples of %d bytes in %d channels", len(dst), len(src), q.encoding.Bytes, q.channels))
	}
	for len(src) > 0 {
		n := min(len(src), len(q.codes))
		q.encodeBlock(dst[:n*q.encoding.Bytes], src[:n])
		if q.nonFinite.set {
			return q.nonFiniteError()
		}
		src, dst = src[n:], dst[n*q.encoding.Bytes:]
		q.frame += int64(n / q.channels)
	}
	return nil
}

func (q *Quantiser) encodeBlock(dst []byte, src []float64) {
	switch {
	case q.encoding.Float && q.encoding.Bytes == 8:
		q.encodeFloat64(dst, src)
	case q.encoding.Float:
		q.encodeFloat32(dst, src)
	default:
		q.round(src)
		pack(dst, q.codes[:len(src)], q.encoding)
	}
}

// round fills codes. Channels without dither need no separate passes.
func (q *Quantiser) round(src []float64) {
	if q.dither == nil {
		q.roundPlain(src, 0, 1)
		return
	}
	for c, d := range q.dither {
		if d == nil {
			q.roundPlain(src, c, q.channels)
		} else {
			q.roundDithered(src, c, d)
		}
	}
}

// roundPlain rounds every stride-th sample of src from the first-th on.
func (q *Quantiser) roundPlain(src []float64, first, stride int) {
	scale, safe := q.scale(), q.safe(0)
	codes := q.codes[:len(src)]
	for i := first; i < len(src); i += stride {
		y := src[i] * scale
		if !(math.Abs(y) <= safe) {
			codes[i] = q.roundLoud(i, src[i], 0)
			continue
		}
		codes[i] = int32(math.RoundToEven(y))
	}
}

func (q *Quantiser) roundDithered(src []float64, channel int, d *Dither) {
	scale, safe := q.scale(), q.safe(ditherPeak)
	codes, state := q.codes[:len(src)], *d
	for i := channel; i < len(src); i += q.channels {
		y, noise := src[i]*scale, state.Next()
		if !(math.Abs(y) <= safe) {
			codes[i] = q.roundLoud(i, src[i], noise)
			continue
		}
		codes[i] = int32(math.RoundToEven(y + noise))
	}
	*d = state
}

// ditherPeak bounds the dither, in LSB.
const ditherPeak = 1

// scale is the number of LSB in full scale, a power of two: scaling is exact,
// and so a machine that fuses it with the addition of dither gets the same sum.
func (q *Quantiser) scale() float64 { return math.Ldexp(1, q.encoding.Bits-1) }

// safe is the largest magnitude, in LSB, that fits with dither of the given
// peak and with half an LSB to spare for rounding, whatever its sign.
func (q *Quantiser) safe(dither float64) float64 { return q.scale() - 1 - dither }

// roundLoud rounds the i-th sample of a block, x, that is near full scale or
// beyond, or no number at all.
func (q *Quantiser) roundLoud(i int, x, noise float64) int32 {
	frame, channel := q.frame+int64(i/q.channels), i%q.channels
	scale, most := q.scale(), q.safe(0)
	y := x * scale
	if y-y != 0 {
		q.refuse(frame, channel, x)
		return 0
	}
	if q.dither != nil && q.dither[channel] != nil {
		most = q.safe(ditherPeak)
	}
	if y < 0 {
		most++ // there is one more code below 0 than above
	}
	q.headroom = max(q.headroom, math.Abs(y)/most)
	code := math.RoundToEven(y + noise)
	fit := min(max(code, -scale), scale-1)
	if code != fit {
		q.overs++
		q.overAt.first(frame, channel)
		q.overPeak = max(q.overPeak, math.Abs(y)/scale)
	}
	return int32(fit)
}

// refuse notes a sample that cannot be encoded at all.
func (q *Quantiser) refuse(frame int64, channel int, value float64) {
	if q.nonFinite.first(frame, channel) {
		q.badValue = value
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
