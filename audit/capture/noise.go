package capture

import (
	"math"

	"fettle/audit/estimate"
)

// noise is what is left of the repeats when their mean is taken away, or, of one
// repeat, what is left long after the response. Cumulative sums over the bins of
// the full grid make its mean over any stretch of frequency cheap.
type noise struct {
	step     float64   // Hz between bins
	response []float64 // Σ density of one repeat's response
	captured []float64 // Σ density of the capture
}

// newNoise takes the energy spectrum of noise that lasts frames frames, in one
// repeat's response.
func (d *deconvolver) newNoise(energy []float64, frames int) *noise {
	n := &noise{
		step:     float64(d.p.Rate) / float64(d.size()),
		response: make([]float64, len(energy)+1),
		captured: make([]float64, len(energy)+1),
	}
	// Energy per sample and Hz of the one-sided spectrum.
	scale := 2 / (float64(frames) * float64(d.p.Rate))
	for k, e := range energy {
		n.response[k+1] = n.response[k] + scale*e
		n.captured[k+1] = n.captured[k] + scale*e*estimate.Power(d.x[k])
	}
	return n
}

// scatter is the noise of one repeat from the scatter of groups of them about
// their mean.
func (d *deconvolver) scatter(groups []group, mean []complex128) *noise {
	energy := make([]float64, len(mean))
	for _, g := range groups {
		for k, v := range g.bins {
			energy[k] += float64(g.size) * estimate.Power(v-mean[k]) / float64(len(groups)-1)
		}
	}
	return d.newNoise(energy, d.length)
}

// tail is the noise of one repeat from the end of its response's region, short of
// the fade.
func (d *deconvolver) tail(region []float64) *noise {
	from, to := d.early+d.late*6/10, d.early+d.late*9/10
	padded := make([]float64, d.size())
	copy(padded, region[from:to])
	bins := d.fft.Coefficients(nil, padded)
	energy := make([]float64, len(bins))
	for k, v := range bins {
		energy[k] = estimate.Power(v)
	}
	return d.newNoise(energy, to-from)
}

// density is the noise of one repeat's response at a frequency, per sample and Hz:
// the mean over a third of an octave.
func (n *noise) density(hz float64) float64 {
	const half = 1.122 // 10^(1/20)
	return n.between(n.response, hz/half, hz*half) / (hz*half - hz/half)
}

// level is the noise in a band as captured, RMS, dB re 1.0.
func (n *noise) level(lo, hi float64) float64 {
	return max(quietest, 10*math.Log10(n.between(n.captured, lo, hi)))
}

// quietest is the level that stands for none.
const quietest = -200.0

// between is the integral of a density over lo..hi in Hz.
func (n *noise) between(sums []float64, lo, hi float64) float64 {
	at := func(hz float64) float64 {
		k := min(max(hz/n.step+0.5, 0), float64(len(sums)-1))
		i := min(int(k), len(sums)-2)
		return sums[i] + (k-float64(i))*(sums[i+1]-sums[i])
	}
	return (at(hi) - at(lo)) * n.step
}
