package pair

import (
	"fmt"
	"math"
	"math/cmplx"

	"fettle/audit/estimate"
)

// judge looks once more, on the spectra, for what the stretches could not show: drift
// of less than a sample, and too little in common.
func (c *comparison) judge(channels []*channel) {
	absent, best := 0, 0.0
	for _, r := range c.report.Channels {
		if r.Absent != "" {
			absent++
		}
		for _, b := range r.Bands {
			best = max(best, b.Coherence)
		}
	}
	if absent == len(c.report.Channels) {
		c.refuse(Silent, "%s", c.report.Channels[0].Absent)
		return
	}
	if best < coherent {
		c.refuse(Unrelated, "the two are not related by a linear filter: no band's coherence reaches %g, the best has %.2f", coherent, best)
		return
	}
	if best < wellRelated {
		c.report.Warnings = append(c.report.Warnings, fmt.Sprintf("even the best band's coherence is only %.2f: noise, distortion or a gain that moves make up the rest", best))
	}
	if v := channels[c.original.loudest()]; v != nil {
		c.lookForDrift(v)
	}
}

// wellRelated is the coherence under which the user is warned.
const wellRelated = 0.9

// steady is how many samples a pair may move apart over the recording.
const steady = 0.05

// lookForDrift fits a line to the lags of the groups against the whole: a filter's own
// dispersion cancels. The whole holds the groups with their drift, so the first line is
// not steep enough; each round takes the drift found so far out of the groups.
func (c *comparison) lookForDrift(v *channel) {
	if len(v.groups) < 4 {
		return
	}
	from, to := c.overlap()
	when := make([]float64, len(v.groups))
	for i, g := range v.groups {
		when[i] = g.frames / float64(g.spectra.segments)
	}
	slope, half := 0.0, 0.0
	for range 30 {
		line := estimate.FitLine(when, v.lags(when, slope))
		slope, half = slope+line.Slope, line.SlopeHalf
		if math.Abs(line.Slope) < max(half, math.Abs(slope))/100 {
			break
		}
	}
	c.report.Drift, c.report.DriftErr = 1e6*slope, 1e6*half
	moved := math.Abs(slope) * float64(to-from)
	if moved > steady && math.Abs(slope) > 2*half {
		c.drifts(slope, half, moved)
		c.report.Channels = nil
	}
}

// lags are those of the groups against the whole, when a drift is taken out of both.
func (v *channel) lags(when []float64, slope float64) []float64 {
	size := v.spectra.size()
	turned := make([][]complex128, len(v.groups))
	whole := make([]complex128, size+1)
	for i, g := range v.groups {
		turned[i] = make([]complex128, size+1)
		step := math.Pi / float64(size) * slope * when[i]
		for k, x := range g.spectra.xy {
			turned[i][k] = x * cmplx.Rect(1, step*float64(k))
			whole[k] += turned[i][k]
		}
	}
	var lags []float64
	for _, t := range turned {
		for k, m := range whole {
			if m == 0 {
				t[k] = 0
				continue
			}
			// Weights of the largest likelihood (Hannan and Thomson 1973); a Hann window
			// spreads over as many bins.
			g := min(v.spectra.coherence(k-3, k+4), mostCoherent)
			t[k] *= cmplx.Conj(m) / complex(estimate.Power(m), 0) * complex(g/(1-g), 0)
		}
		lags = append(lags, estimate.LagOf(t, 2*size).Samples)
	}
	return lags
}

// mostCoherent bounds a bin's weight: leakage limits what a segment can tell.
const mostCoherent = 1 - 1e-6
