package pcm

import (
	"fmt"
	"math"

	"fettle/audio/internal/vector"
)

// blockSamples is how many samples are rounded at once: few enough that they, their
// dither and their codes stay in the first-level cache.
const blockSamples = 2048

// Quantiser turns interleaved float64 samples into bytes, remembers where a
// stream stands, and counts what does not fit. Not for concurrent use.
type Quantiser struct {
	encoding Encoding
	channels int
	dither   []*Dither // one a channel, or none at all
	dithered bool      // some channel is
	scale    float64   // LSB in full scale
	safe     float64   // LSB, see setScale
	frame    int64     // frames encoded so far

	// Of a block: the dither of every channel, 0 where there is none, the same
	// interleaved, and codes.
	drawn [][]float64
	noise []float64
	codes []int32

	overs     int64
	overPeak  float64
	overAt    place
	headroom  float64 // largest ratio of a sample to what its channel can hold
	nonFinite place
	badValue  float64
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
	q := &Quantiser{encoding: e, channels: channels, dither: dither}
	for _, d := range dither {
		q.dithered = q.dithered || d != nil
	}
	if q.dithered && e.Float {
		return nil, fmt.Errorf("%v takes no dither; dither only PCM", e)
	}
	q.setScale()
	q.allocate(max(1, blockSamples/channels))
	return q, nil
}

// ditherPeak bounds the dither, in LSB.
const ditherPeak = 1

// setScale sets scale, a power of two: scaling is exact, and so a machine that
// fuses it with the addition of dither gets the same sum. safe is the largest
// magnitude that fits any channel whatever its sign and its dither, with half an
// LSB to spare for rounding.
func (q *Quantiser) setScale() {
	q.scale = math.Ldexp(1, q.encoding.Bits-1)
	q.safe = q.scale - 1
	if q.dithered {
		q.safe -= ditherPeak
	}
}

// allocate makes what blocks of so many frames need.
func (q *Quantiser) allocate(frames int) {
	q.codes, q.noise = make([]int32, frames*q.channels), make([]float64, frames*q.channels)
	q.drawn = make([][]float64, len(q.dither))
	for c := range q.drawn {
		q.drawn[c] = make([]float64, frames)
	}
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

// loudRun is how many samples are rounded in Go where the assembly meets a loud
// one: others are likely to follow.
const loudRun = 16

func (q *Quantiser) encodeBlock(dst []byte, src []float64) {
	if q.dithered {
		q.drawNoise(len(src) / q.channels)
	}
	for at := 0; at < len(src); {
		at += q.encodeBulk(dst, src, at)
		run := len(src) - at
		if vector.Used() != vector.None {
			run = min(run, loudRun)
		}
		q.encodeGeneric(dst, src, at, at+run)
		at += run
	}
}

// drawNoise draws the dither of some frames.
func (q *Quantiser) drawNoise(frames int) {
	for c, d := range q.dither {
		if d != nil {
			d.Fill(q.drawn[c][:frames])
		}
	}
	Interleave(q.noise[:frames*q.channels], q.drawn, 0)
}

// encodeBulk encodes samples of src from the at-th on with what assembly there is,
// until one is loud, or not finite, or too few are left. It returns how many.
func (q *Quantiser) encodeBulk(dst []byte, src []float64, at int) int {
	dst, src = dst[at*q.encoding.Bytes:], src[at:]
	if q.encoding.Float {
		return floatBulk(dst, src, q.encoding)
	}
	return roundBulk(dst, src, q.noise[at:], q.encoding, q.scale, q.safe)
}

// encodeGeneric encodes the samples of src from the first-th up to end.
func (q *Quantiser) encodeGeneric(dst []byte, src []float64, first, end int) {
	dst, src = dst[first*q.encoding.Bytes:end*q.encoding.Bytes], src[first:end]
	switch {
	case q.encoding.Float && q.encoding.Bytes == 8:
		q.encodeFloat64(dst, src, first)
	case q.encoding.Float:
		q.encodeFloat32(dst, src, first)
	default:
		q.round(src, first)
		pack(dst, q.codes[:len(src)], q.encoding)
	}
}

// round fills codes with those of src, whose first sample is the at-th of a block.
func (q *Quantiser) round(src []float64, at int) {
	for i := 0; i < len(src); i++ {
		i += roundQuiet(q.codes[i:], src[i:], q.noise[at+i:], q.scale, q.safe)
		if i < len(src) {
			q.codes[i] = q.roundLoud(at+i, src[i], q.noise[at+i])
		}
	}
}

// roundQuiet rounds samples until one is loud, and returns how many. A sum from
// 2^52 to 2^53 is a whole number, rounded as wanted, that stands in its lower bits.
func roundQuiet(codes []int32, src, noise []float64, scale, safe float64) int {
	codes, noise = codes[:len(src)], noise[:len(src)]
	for i, x := range src {
		y := x * scale
		if !(math.Abs(y) <= safe) {
			return i
		}
		codes[i] = int32(math.Float64bits(y + noise[i] + 0x1.8p52))
	}
	return len(src)
}
