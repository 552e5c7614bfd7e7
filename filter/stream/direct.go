package stream

import "slices"

// directChunk is how many samples direct summation takes from its history
// buffer before moving what is left to the front.
const directChunk = 1024

// direct sums the taps sample by sample.
type direct struct {
	reversed []float64   // the taps, last first
	recent   [][]float64 // a channel: the last taps-1 samples, then a chunk
}

func newDirect(taps []float64, channels int) *direct {
	d := &direct{reversed: slices.Clone(taps), recent: planes(channels, len(taps)-1+directChunk)}
	slices.Reverse(d.reversed)
	return d
}

func (d *direct) Delay() int { return 0 }
func (d *direct) Tail() int  { return len(d.reversed) - 1 }
func (d *direct) Reset()     { silence(d.recent) }

func (d *direct) Process(dst, src [][]float64) {
	frames := checkShape(dst, src, len(d.recent))
	history := len(d.reversed) - 1
	for from := 0; from < frames; from += directChunk {
		to := min(frames, from+directChunk)
		for c, recent := range d.recent {
			copy(recent[history:], src[c][from:to])
			sumTaps(dst[c][from:to], recent, d.reversed)
			copy(recent[:history], recent[to-from:])
		}
	}
}

// sumTaps sets y[i] to the sum of h[j] x[i+j]. Four sums run abreast to hide
// the latency of the additions. The conversions keep a compiler from fusing
// multiplication and addition in one loop and not in the other, which would
// let the output depend on how the calls are cut.
func sumTaps(y, x, h []float64) {
	i := 0
	for ; i+4 <= len(y); i += 4 {
		p, q, r := x[i], x[i+1], x[i+2]
		var a, b, c, d float64
		ahead := x[i+3:][:len(h)]
		for j, t := range h {
			s := ahead[j]
			a += float64(t * p)
			b += float64(t * q)
			c += float64(t * r)
			d += float64(t * s)
			p, q, r = q, r, s
		}
		y[i], y[i+1], y[i+2], y[i+3] = a, b, c, d
	}
	for ; i < len(y); i++ {
		var a float64
		for j, t := range h {
			a += float64(t * x[i+j])
		}
		y[i] = a
	}
}
