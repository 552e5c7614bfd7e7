package figures

import (
	"math"
	"math/cmplx"

	"fettle/filter/response"
)

// stated is the least |H|² that a phase or group delay is stated for, as a share of its maximum: -60 dB.
const stated = 1e-6

// phaseCurve is arg(H e^(j2πfD)) from the lowest band's edge to 0.45 fs, unwrapped, less the
// line fitted to it over 20 Hz to 0.45 fs; NaN where |H| is more than 60 dB under its maximum.
type phaseCurve struct {
	first    int // bin of residual[0]
	residual []float64
}

// phaseResidual fits a slope and a whole multiple of 180° by pink-weighted least
// squares and takes them away.
func (s *spectrum) phaseResidual(d float64) *phaseCurve {
	c := s.unwrapped(d)
	var ww, wf, wff, wp, wfp float64
	c.each(s, func(f, w, phase float64) {
		ww += w
		wf += w * f
		wff += w * f * f
		wp += w * phase
		wfp += w * f * phase
	})
	// The cost is a parabola in the constant, so the nearest multiple to its free fit is the best one.
	constant := math.Pi * math.Round((wp*wff-wfp*wf)/(ww*wff-wf*wf)/math.Pi)
	slope := (wfp - constant*wf) / wff
	for i := range c.residual {
		c.residual[i] -= constant + slope*float64(c.first+i)*s.step
	}
	return c
}

// unwrapped follows the phase from bin to bin and takes the nearest branch, across gaps too.
func (s *spectrum) unwrapped(d float64) *phaseCurve {
	q := response.NewQuadrature(s.step, band(lowestBand).Lower, response.TopOfBand*s.rate)
	c := &phaseCurve{first: q.First, residual: make([]float64, q.Last-q.First+1)}
	turns := s.turns(q.First, d)
	var last float64
	for i := range c.residual {
		h, turned := s.h[q.First+i], turns.Next()
		if power(h) < stated*s.peak {
			c.residual[i] = math.NaN()
			continue
		}
		phase := cmplx.Phase(h * turned)
		last = phase - 2*math.Pi*math.Round((phase-last)/(2*math.Pi))
		c.residual[i] = last
	}
	return c
}

// each visits the points where phase is stated: frequency in Hz, pink weight |H|²/f df, phase.
func (c *phaseCurve) each(s *spectrum, visit func(f, w, phase float64)) {
	response.EachPink(s.step, s.rate, func(k int, pink float64) {
		if phase := c.residual[k-c.first]; !math.IsNaN(phase) {
			visit(float64(k)*s.step, pink*power(s.h[k]), phase)
		}
	})
}

// deviation is the pink-weighted mean of the absolute residual over a band, in
// degrees; NaN where none of the band is stated.
func (c *phaseCurve) deviation(s *spectrum, b Band) float64 {
	var sum, weight float64
	s.each(b.Lower, b.Upper, func(k int, width float64) {
		if phase := c.residual[k-c.first]; !math.IsNaN(phase) {
			w := width / (float64(k) * s.step) * power(s.h[k])
			sum += w * math.Abs(phase)
			weight += w
		}
	})
	return sum / weight * 180 / math.Pi
}
