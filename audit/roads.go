package audit

import (
	"math"

	"fettle/audit/figures"
	"fettle/filter/response"
)

// road is one way of measuring: it visits the bins of a common grid, in any order, with
// |H|^2 and with the group delay in samples after the aligned instant times |H|^2. Their
// sums over a band give its arrival without a division by a small |H|.
type road func(visit func(k int, energy, delayed float64))

func inner(a, b complex128) float64 { return real(a)*real(b) + imag(a)*imag(b) }

// moments asks for DFT(x) and DFT((n - origin) x).
func moments(x []float64, origin int) (spectrum, moment response.Sequence) {
	return response.Sequence{X: x}, response.Sequence{X: x, Moments: true, Origin: float64(origin)}
}

// impulseRoad reads a response in time.
func impulseRoad(h []float64, origin, size int) road {
	spectrum, moment := moments(h, origin)
	return func(visit func(k int, energy, delayed float64)) {
		response.NewTransform(size, len(h)).Each(func(k int, v []complex128) {
			visit(k, inner(v[0], v[0]), inner(v[1], v[0]))
		}, spectrum, moment)
	}
}

// chirpRoad divides spectra. The group delay of a quotient is the difference of
// the group delays, so nothing need be transformed back and what lies outside
// the chirp's band does no harm.
func chirpRoad(x, y []float64, size int) road {
	// Both about the chirp's middle: large moments would cost digits.
	in, inMoment := moments(x, len(x)/2)
	out, outMoment := moments(y, len(x)/2)
	return func(visit func(k int, energy, delayed float64)) {
		response.NewTransform(size, size).Each(func(k int, v []complex128) {
			xx, yy := inner(v[0], v[0]), inner(v[2], v[2])
			visit(k, yy/xx, (inner(v[3], v[2])-inner(v[1], v[0])*yy/xx)/xx)
		}, in, inMoment, out, outMoment)
	}
}

// analyticRoad takes the realised coefficients' own formulas; shift is the
// aligned instant in the response that they have.
func analyticRoad(s response.System, shift, size int) road {
	return func(visit func(k int, energy, delayed float64)) {
		s.EachBin(size, func(k int, squared, delay float64) {
			if !math.IsNaN(delay) { // else more than 60 dB down: too little to count
				visit(k, squared, (delay-float64(shift))*squared)
			}
		})
	}
}

// arrivals gives each band's energy-weighted group delay in seconds, on the grid of a
// transform of size points.
func (r road) arrivals(bands []figures.BandFigures, rate float64, size int) []float64 {
	step := rate / float64(size)
	at := make([]int8, size/2+1) // the band of a bin, from 1; 0: none
	for i, b := range bands {
		for k := int(math.Ceil(b.Lower / step)); float64(k)*step < b.Upper; k++ {
			at[k] = int8(i + 1)
		}
	}
	energy, delayed := make([]float64, len(bands)+1), make([]float64, len(bands)+1)
	r(func(k int, e, d float64) {
		energy[at[k]] += e
		delayed[at[k]] += d
	})
	out := make([]float64, len(bands))
	for i := range out {
		out[i] = delayed[i+1] / energy[i+1] / rate
	}
	return out
}

// disagreement is how far two roads' arrivals are apart, in seconds, in the
// worst carried band; NaN when no band is carried.
func disagreement(a, b []float64, bands []figures.BandFigures) float64 {
	worst := math.NaN()
	for i, band := range bands {
		if d := math.Abs(a[i] - b[i]); band.Carried && !(d <= worst) {
			worst = d
		}
	}
	return worst
}

// gridFor is a transform size that holds frames frames and whose points stand
// close enough that the narrowest band, 4.6 Hz wide, has ten.
func gridFor(frames int, rate float64) int {
	return response.NextPow2(max(frames, int(rate/0.46)))
}
