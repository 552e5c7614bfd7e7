package pair

import (
	"math"
	"slices"

	"fettle/audit/estimate"
	"fettle/filter/response"

	"gonum.org/v1/gonum/dsp/fourier"
)

// envelope is a recording's energy in bands, step by step, all channels together.
type envelope struct {
	rate   int
	step   int // frames
	frames int64
	energy [][]float64 // band, step
	loud   []float64   // each channel's energy
}

const (
	stepsPerSecond = 100
	// mostSteps bounds the memory: longer recordings have longer steps.
	mostSteps = 1 << 20
)

// bandEdges are two octaves apart: what one filter takes away leaves others.
var bandEdges = []float64{100, 400, 1600, 6400, 25600}

// envelopeOf reads a whole recording.
func envelopeOf(o Opener) (*envelope, error) {
	r, err := open(o)
	if err != nil {
		return nil, err
	}
	defer r.close()
	f := r.src.Format()
	e := &envelope{rate: f.SampleRate, step: max(f.SampleRate/stepsPerSecond, 8), loud: make([]float64, f.NumChannels)}
	e.energy = make([][]float64, len(bandEdges)-1)
	base := e.step
	fft := fourier.NewFFT(2 * base)
	last, next := newPlanes(f.NumChannels, base), newPlanes(f.NumChannels, base)
	frame, bins := make([]float64, 2*base), make([]complex128, base+1)
	pending, sums := 0, make([]float64, len(e.energy))
	for {
		n, err := r.read(next)
		if err != nil {
			return nil, err
		}
		for c := range next {
			clear(next[c][n:])
			copy(frame, last[c])
			copy(frame[base:], next[c])
			e.loud[c] += hann(frame)
			fft.Coefficients(bins, frame)
			e.split(sums, bins)
		}
		last, next = next, last
		if pending += base; pending == e.step || n < base {
			e.push(sums)
			pending = 0
		}
		if n < base {
			e.frames = r.at
			return e, nil
		}
	}
}

// hann windows a frame and returns its energy before that.
func hann(x []float64) float64 {
	var energy float64
	for n, v := range x {
		energy += v * v
		x[n] = v * (0.5 - 0.5*math.Cos(2*math.Pi*float64(n)/float64(len(x))))
	}
	return energy
}

// split adds a frame's energy to the bands' sums.
func (e *envelope) split(sums []float64, bins []complex128) {
	hz := float64(e.rate) / float64(2*(len(bins)-1))
	b := 0
	for k := 1; k < len(bins); k++ {
		f := float64(k) * hz
		for b < len(sums)-1 && f >= bandEdges[b+1] {
			b++
		}
		if f >= bandEdges[0] {
			sums[b] += estimate.Power(bins[k])
		}
	}
}

// push ends a step; when there are too many, pairs of them become one.
func (e *envelope) push(sums []float64) {
	for b := range sums {
		e.energy[b] = append(e.energy[b], sums[b])
	}
	clear(sums)
	if len(e.energy[0]) == mostSteps {
		e.halve()
	}
}

func (e *envelope) halve() {
	for b, x := range e.energy {
		for i := range len(x) / 2 {
			x[i] = x[2*i] + x[2*i+1]
		}
		e.energy[b] = x[:len(x)/2]
	}
	e.step *= 2
}

// silent tells whether there is nothing at all.
func (e *envelope) silent() bool { return slices.Max(e.loud) == 0 }

// loudest is the channel with the most energy.
func (e *envelope) loudest() int {
	best := 0
	for c, v := range e.loud {
		if v > e.loud[best] {
			best = c
		}
	}
	return best
}

// floor is what is added to a band's energy before its logarithm is taken, as a share of
// its mean: what is 40 dB under it hardly counts.
const floor = 1e-4

// faintBand is the share of all energy under which a band holds nothing but what leaks
// into it.
const faintBand = 1e-6

// total is the energy of all bands.
func (e *envelope) total() float64 {
	var sum float64
	for _, x := range e.energy {
		for _, v := range x {
			sum += v
		}
	}
	return sum
}

// steadiness is the RMS of the changes of a band's log energy under which it counts
// as steady: a tone's comes from how it meets the steps.
const steadiness = 0.01

// shape is how a band's log energy changes from step to step, read at every scale-th
// step (not a whole number), with unit energy; nil where nothing changes.
func (e *envelope) shape(band int, scale float64) []float64 {
	x := smoothed(e.energy[band])
	var mean float64
	for _, v := range x {
		mean += v / float64(len(x))
	}
	if mean <= faintBand*e.total()/float64(len(x)) {
		return nil
	}
	n := int(float64(len(x)-1)/scale) + 1
	y := make([]float64, 0, n)
	last, energy := 0.0, 0.0
	for i := range n {
		log := math.Log(between(x, float64(i)*scale) + floor*mean)
		if i > 0 {
			y = append(y, log-last)
			energy += (log - last) * (log - last)
		}
		last = log
	}
	if energy <= steadiness*steadiness*float64(len(y)) {
		return nil
	}
	for i := range y {
		y[i] /= math.Sqrt(energy)
	}
	return y
}

// smoothed is x with each value and its neighbours weighed 1:2:1, so that half a step more
// or less hardly matters.
func smoothed(x []float64) []float64 {
	y := make([]float64, len(x))
	for i, v := range x {
		y[i] = (x[max(i-1, 0)] + 2*v + x[min(i+1, len(x)-1)]) / 4
	}
	return y
}

// between reads x between its values.
func between(x []float64, at float64) float64 {
	i := min(int(at), len(x)-1)
	j := min(i+1, len(x)-1)
	return x[i] + (at-float64(i))*(x[j]-x[i])
}

// match is how well two envelopes fit when one is moved.
type match struct {
	frames int64   // how much later the second is
	clear  float64 // peak over the standard deviation of the correlation
}

// against correlates two envelopes, b read at a scale: what b plays is scale times as
// fast when it fits.
func (a *envelope) against(b *envelope, scale float64) match {
	size := response.NextPow2(len(a.energy[0]) + int(float64(len(b.energy[0]))/scale) + 2)
	fft := fourier.NewFFT(size)
	sum := make([]complex128, size/2+1)
	transform := func(x []float64) []complex128 {
		padded := make([]float64, size)
		copy(padded, x)
		return fft.Coefficients(nil, padded)
	}
	for band := range a.energy {
		x, y := a.shape(band, 1), b.shape(band, scale)
		if x == nil || y == nil {
			continue
		}
		u, v := transform(x), transform(y)
		for k := range sum {
			sum[k] += complex(real(u[k]), -imag(u[k])) * v[k]
		}
	}
	r := fft.Sequence(nil, sum)
	best, energy := 0, 0.0
	for i, v := range r {
		energy += v * v
		if v > r[best] {
			best = i
		}
	}
	m := match{clear: r[best] / math.Sqrt(energy/float64(size))}
	if energy == 0 {
		m.clear = 0
	}
	if best > size/2 {
		best -= size
	}
	m.frames = int64(best) * int64(a.step)
	return m
}

// together brings two envelopes to one step.
func together(a, b *envelope) {
	for a.step < b.step {
		a.halve()
	}
	for b.step < a.step {
		b.halve()
	}
}
