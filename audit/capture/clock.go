package capture

import (
	"math"

	"fettle/audit/estimate"
	"fettle/filter/response"
)

// clock fits a straight line to how far the repeats are off their distance, in
// samples over samples of the probe. Drift disperses a chirp, but every repeat
// alike, so the delay between two of them is free of it. Noise that is white in the
// capture is so in the pulses, and their cross-spectrum needs no weights.
func (s *sighting) clock(period int) estimate.Line {
	reach := s.p.Rate/20 + int(2*mostPPM*1e-6*float64(s.p.Signal))
	size := response.NextPow2(4 * reach)
	first := response.Spectrum(s.cut(s.starts[0], reach), size)
	var when, off []float64
	for r, start := range s.starts {
		when = append(when, float64(r*period))
		if r == 0 {
			off = append(off, 0)
			continue
		}
		cross := response.Spectrum(s.cut(start, reach), size)
		for k, c := range cross {
			f := first[k]
			cross[k] = c * complex(real(f), -imag(f))
		}
		lag := estimate.LagOf(cross, size)
		off = append(off, float64(start-s.starts[0]-r*period)+lag.Samples)
	}
	return estimate.FitLine(when, off)
}

// cut is what stands within reach of an index, faded at both ends.
func (s *sighting) cut(at, reach int) []float64 {
	x := make([]float64, 2*reach)
	for i := range x {
		if n := at - reach + i; n >= 0 && n < len(s.pulses) {
			u := float64(min(i+1, len(x)-i)) / float64(reach) * 4
			x[i] = s.pulses[n] * smooth(u)
		}
	}
	return x
}

// smooth rises from 0 to 1 over 0..1 as a squared sine.
func smooth(u float64) float64 {
	sin := math.Sin(math.Pi / 2 * min(max(u, 0), 1))
	return sin * sin
}
