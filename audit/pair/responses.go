package pair

import (
	"math"

	"fettle/audit/estimate"
	"fettle/audit/figures"
	"fettle/filter/response"

	"gonum.org/v1/gonum/dsp/fourier"
)

// channel is the estimate of one channel's response.
//
// H = Sxy/Sxx is biased where the original's spectrum is steep, as between the lines of
// sustained notes: the window spreads a line over its neighbours, and the response
// at the line with it. So the response is the one of limited length that explains the
// output best (least squares by the normal equations, Wiener 1949). The windows
// at the recordings' ends falsify that a little too; so the output is predicted by the response found, without
// any window, and what is left explained once more, until that changes nothing that the
// scatter of the groups leaves open.
type channel struct {
	groups  []group
	spectra *spectra  // of all groups
	matrix  *toeplitz // of the normal equations
	h       []float64 // time 0 is the middle
	parts   [][]float64
	weights []float64 // how far each bin of spectra is believed
	done    bool
}

const (
	// reachOfSize is how many times a segment is as long as the response is to either
	// side.
	reachOfSize = 8
	// solved is how small a share of the right side the normal equations may leave.
	solved = 1e-10
)

// newChannel takes the sums of the first reading.
func newChannel(groups []group) *channel {
	size := groups[0].spectra.size()
	c := &channel{groups: groups, spectra: newSpectra(size), h: make([]float64, 2*size/reachOfSize)}
	for i, g := range groups {
		c.spectra.add(g.spectra, 1)
		c.groups[i].left = append([]complex128(nil), g.spectra.across...)
	}
	c.weights = c.spectra.weights()
	return c
}

// clear makes the groups ready for another reading of what is left.
func (c *channel) clear() {
	for _, g := range c.groups {
		clear(g.left)
	}
}

// of is where a part's cross-spectra of what is left are summed.
func (c *channel) of(part int) []complex128 {
	for _, g := range c.groups {
		if g.part == part {
			return g.left
		}
	}
	return nil
}

// explain adds to the response what explains best what it has left so far. Where that
// is the last time, the jackknife's parts do so without a group each.
func (c *channel) explain(w *welch, last bool) {
	left := make([]complex128, len(c.weights))
	for _, g := range c.groups {
		for k, v := range g.left {
			left[k] += v
		}
	}
	reach := len(c.h) / 2
	if c.matrix == nil {
		c.matrix = newToeplitz(w.row(c.spectra.long, reach))
	}
	right := w.right(left, reach)
	enough := solved * math.Sqrt(dot(right, right))
	change := c.matrix.solve(right, enough)
	if c.done = last || c.small(w, change); c.done {
		c.parts = nil
		for _, g := range c.groups {
			rest := make([]complex128, len(left))
			for k, v := range left {
				rest[k] = v - g.left[k]
			}
			matrix := newToeplitz(w.row(c.spectra.without(g.spectra).long, reach))
			c.parts = append(c.parts, plus(matrix.solve(w.right(rest, reach), enough), c.h))
		}
	}
	c.h = plus(c.h, change)
}

// plus adds b to a.
func plus(a, b []float64) []float64 {
	for i, v := range b {
		a[i] += v
	}
	return a
}

// small tells whether a change is a tenth of what the scatter of the groups leaves open,
// or less, in every quarter of an octave.
func (c *channel) small(w *welch, change []float64) bool {
	bins := w.transfer(change)
	open := make([]float64, len(bins))
	n := float64(len(c.groups))
	for _, g := range c.groups {
		right := w.right(g.left, len(c.h)/2)
		for i, v := range w.transfer(c.matrix.nearly(right)) {
			open[i] += estimate.Power(v - bins[i]/complex(n, 0))
		}
	}
	for lo := 16; lo < len(bins); {
		hi := min(lo*5/4, len(bins))
		var moved, left float64
		for i := lo; i < hi; i++ {
			moved += estimate.Power(bins[i])
			left += open[i]
		}
		if moved > 0.01*left {
			return false
		}
		lo = hi
	}
	return true
}

// view is a response and what is read off it.
type view struct {
	at    *estimate.Spectrum
	delay float64
	sign  int
	bands []estimate.Band
	gain  float64 // power
}

// view looks at a response as far as coherence lets it be believed.
func (c *channel) view(h []float64, gain, rate float64) *view {
	size := 4 * len(h)
	bins := response.Spectrum(h, size)
	for k := range bins {
		at := k * 2 * c.spectra.size() * 2 / size / 2
		bins[k] *= complex(c.weights[at]/float64(size), 0)
	}
	x := fourier.NewFFT(size).Sequence(nil, bins)[:len(h)]
	v := &view{at: estimate.Transform(x, len(x)/2, rate), gain: gain}
	v.delay, v.sign = v.at.Latency()
	for _, b := range figures.Bands(rate) {
		v.bands = append(v.bands, v.at.Band(b))
	}
	return v
}
