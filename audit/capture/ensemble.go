package capture

import (
	"math"

	"fettle/audit/atonce"
)

// group is the mean of some repeats.
type group struct {
	size int
	bins []complex128 // its response on the full grid
	h    []float64    // and in time: what counts of it
}

// mostGroups is how many groups repeats are gathered in at most: enough degrees of
// freedom, and every one costs a measurement of all figures.
const mostGroups = 8

// ensemble is a channel's repeats, deconvolved.
type ensemble struct {
	*deconvolver
	groups []group
	mean   []float64 // of the groups' h; index ahead stands for index 0
	noise  *noise
	top    float64 // the largest sample of the response before it was continued
	// doubt is what the other continuation outside the probe's band would add to the
	// linear response's region; nil when it makes no difference.
	doubt []float64
}

// ordersOf is the highest order of distortion that is looked for.
const ordersOf = 5

// gather deconvolves all repeats of a channel.
func (d *deconvolver) gather(y []float64) *ensemble {
	e := &ensemble{deconvolver: d}
	e.groups = make([]group, min(d.repeats, mostGroups))
	atonce.Do(len(e.groups), len(e.groups), func(i int) {
		w := d.worker()
		for r := range d.repeats {
			if r*len(e.groups)/d.repeats == i {
				e.groups[i].add(w.quotient(y, r))
			}
		}
	})
	mean := make([]complex128, len(d.x))
	for _, g := range e.groups {
		for k, v := range g.bins {
			mean[k] += v / complex(float64(d.repeats), 0)
		}
		g.divide()
	}
	more, other, raw := d.continueFrom(mean)
	if len(e.groups) > 1 {
		e.noise = d.scatter(e.groups, mean)
	} else {
		e.noise = d.tail(raw)
	}
	e.top = raw[peakOf(raw)]
	atonce.Do(len(e.groups), len(e.groups), func(i int) { e.groups[i].settle(d.worker(), more) })
	e.mean = e.without(-1)
	e.doubt = e.doubtOf(more, other)
	return e
}

func (e *ensemble) doubtOf(more, other []complex128) []float64 {
	off := make([]complex128, len(more))
	var most float64
	for k := range off {
		off[k] = other[k] - more[k]
		most = max(most, math.Abs(real(off[k])), math.Abs(imag(off[k])))
	}
	if most == 0 {
		return nil
	}
	return e.region(e.sequence(off))
}

func (g *group) add(bins []complex128) {
	g.size++
	if g.bins == nil {
		g.bins = bins
		return
	}
	for k, v := range bins {
		g.bins[k] += v
	}
}

func (g *group) divide() {
	for k := range g.bins {
		g.bins[k] /= complex(float64(g.size), 0)
	}
}

// settle continues a group's response outside the probe's band and takes it to time.
func (g *group) settle(d *deconvolver, more []complex128) {
	for k, v := range more {
		g.bins[k] += v
	}
	h := d.sequence(g.bins)
	g.bins = nil
	g.h = append(append([]float64(nil), h[len(h)-d.ahead:]...), h[:d.late]...)
}

// without is the mean of all repeats but those of one group; -1 leaves none out.
func (e *ensemble) without(out int) []float64 {
	mean := make([]float64, len(e.groups[0].h))
	count := 0
	for i, g := range e.groups {
		if i != out {
			count += g.size
			for n, v := range g.h {
				mean[n] += float64(g.size) * v
			}
		}
	}
	for n := range mean {
		mean[n] /= float64(count)
	}
	return mean
}

// linear is the linear response's region of a sequence like mean.
func (e *ensemble) linear(h []float64) []float64 {
	return faded(h[e.ahead-e.early:], e.early/10, e.late/10)
}

// faded is a copy of x with tapers of so many samples at its ends.
func faded(x []float64, in, out int) []float64 {
	y := append([]float64(nil), x...)
	for i := range y {
		y[i] *= smooth(float64(i+1)/float64(in+1)) * smooth(float64(len(y)-i)/float64(out+1))
	}
	return y
}

// peakOf is the index of the largest sample.
func peakOf(x []float64) int {
	best := 0
	for i, v := range x {
		if math.Abs(v) > math.Abs(x[best]) {
			best = i
		}
	}
	return best
}

// orderSplit is the order half way from one product to the next.
func orderSplit(order int) float64 { return math.Sqrt(float64(order * (order + 1))) }
