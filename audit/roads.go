package audit

import (
	"math"

	"fettle/audit/figures"
	"fettle/filter/response"

	"gonum.org/v1/gonum/dsp/fourier"
)

// road is what one way of measuring says on a common grid: |H|^2, and the group
// delay in samples after the aligned instant times |H|^2. Their sums over a band
// give its arrival without a division by a small |H|.
type road struct{ energy, delayed []float64 }

// moments gives X = DFT(x) and N = DFT((n - origin) x).
func moments(x []float64, origin, size int) (spectrum, moment []complex128) {
	fft := fourier.NewFFT(size)
	buf := make([]float64, size)
	copy(buf, x)
	spectrum = fft.Coefficients(nil, buf)
	clear(buf)
	for n, v := range x {
		buf[n] = float64(n-origin) * v
	}
	return spectrum, fft.Coefficients(nil, buf)
}

func inner(a, b complex128) float64 { return real(a)*real(b) + imag(a)*imag(b) }

// impulseRoad reads a response in time.
func impulseRoad(h []float64, origin, size int) road {
	spectrum, moment := moments(h, origin, size)
	r := road{make([]float64, len(spectrum)), make([]float64, len(spectrum))}
	for k, v := range spectrum {
		r.energy[k] = inner(v, v)
		r.delayed[k] = inner(moment[k], v)
	}
	return r
}

// chirpRoad divides spectra. The group delay of a quotient is the difference of
// the group delays, so nothing need be transformed back and what lies outside
// the chirp's band does no harm.
func chirpRoad(x, y []float64, size int) road {
	// Both about the chirp's middle: large moments would cost digits.
	in, inMoment := moments(x, len(x)/2, size)
	out, outMoment := moments(y, len(x)/2, size)
	r := road{make([]float64, len(in)), make([]float64, len(in))}
	for k := range in {
		xx, yy := inner(in[k], in[k]), inner(out[k], out[k])
		r.energy[k] = yy / xx
		r.delayed[k] = (inner(outMoment[k], out[k]) - inner(inMoment[k], in[k])*yy/xx) / xx
	}
	return r
}

// analyticRoad takes the realised coefficients' own formulas; shift is the
// aligned instant in the causal response.
func analyticRoad(h []complex128, tau []float64, shift int) road {
	r := road{make([]float64, len(h)), make([]float64, len(h))}
	for k, v := range h {
		if math.IsNaN(tau[k]) { // more than 60 dB down: too little to count
			continue
		}
		r.energy[k] = inner(v, v)
		r.delayed[k] = (tau[k] - float64(shift)) * r.energy[k]
	}
	return r
}

// arrivals gives each band's energy-weighted group delay in seconds.
func (r road) arrivals(bands []figures.BandFigures, rate float64, size int) []float64 {
	out := make([]float64, len(bands))
	step := rate / float64(size)
	for i, b := range bands {
		var energy, delayed float64
		for k := int(math.Ceil(b.Lower / step)); float64(k)*step < b.Upper; k++ {
			energy += r.energy[k]
			delayed += r.delayed[k]
		}
		out[i] = delayed / energy / rate
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
