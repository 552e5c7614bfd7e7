package design

import (
	"fmt"
	"math"
	"slices"
)

const (
	converged  = 1e-9 // spread of the extrema's heights at which the exchange ends
	acceptable = 1e-6 // spread still good when rounding allows no better
	settled    = 1e-7 // spread that, reached twice, is the most rounding allows
	roughly    = 1e-2 // spread that is enough of a start on a finer grid
)

// solution is where an exchange has arrived.
type solution struct {
	curve  *curve
	ref    []gridPoint
	next   []gridPoint // the extrema found: a better reference
	spread float64     // (highest - lowest extremum)/highest
	peak   float64     // highest extremum
}

// exchanger runs the Remez exchange on one grid.
type exchanger struct {
	spec      BandSpec
	grid      []gridPoint
	parabolas int // laid to seek an extremum between the points; 0: keep to the points
}

// exchange solves a valid specification. With anyWidth, bands narrower than a
// grid step get a finer grid of their own instead of an error.
func exchange(s BandSpec, o RemezOptions, anyWidth bool) (*solution, error) {
	density, parabolas := o.Grid, 0
	if density == 0 {
		density, parabolas = 10, 3
	}
	x, err := newExchanger(s, density, parabolas, anyWidth)
	if err != nil {
		return nil, err
	}
	rough, err := sketch(s)
	if err != nil {
		return nil, err
	}
	if x.parabolas > 0 {
		return x.run(rough.next, converged)
	}
	return x.run(x.nearest(rough.next), converged)
}

// sketch solves roughly, on a coarse grid.
func sketch(s BandSpec) (*solution, error) {
	const density = 5
	x, err := newExchanger(s, density, 1, true)
	if err != nil {
		return nil, err
	}
	return x.run(x.leja(), roughly)
}

func newExchanger(s BandSpec, density, parabolas int, anyWidth bool) (*exchanger, error) {
	width := math.Pi
	if parabolas > 0 {
		width = s.width() // all extrema lie in the bands, the closer the narrower these are
	}
	g := gridder{spec: s, step: width / float64(density*s.cosines()), crowded: parabolas > 0}
	if anyWidth {
		g.least = 4
	}
	grid, err := g.grid()
	return &exchanger{spec: s, grid: grid, parabolas: parabolas}, err
}

// run exchanges until the extrema are equal to within the wanted spread, or for
// a while neither they become more equal nor the deviation larger: at any
// reference it is a lower bound of the least possible (de la Vallee Poussin;
// Cheney, Introduction to Approximation Theory, 1966, chapter 3).
func (x *exchanger) run(ref []gridPoint, wanted float64) (*solution, error) {
	const patience = 12
	var best *solution
	bound, last := 0.0, 1.0
	for idle := 0; idle < patience; idle++ {
		d, err := x.step(ref)
		if err != nil {
			return nil, x.explain(err, d)
		}
		if best == nil || d.spread < best.spread {
			best, idle = d, -1
		}
		if now := math.Abs(d.curve.delta); now > bound*(1+1e-6) {
			bound, idle = now, -1
		}
		if d.spread <= wanted || d.spread <= settled && last <= settled || same(ref, d.next) {
			break
		}
		last = d.spread
		ref = d.next
	}
	if best.spread <= math.Max(acceptable, wanted) && !x.drowns(best) {
		return best, nil
	}
	return nil, x.explain(fmt.Errorf("%w: the extrema still differ by %.2g of their height", errStuck, best.spread), best)
}

func same(a, b []gridPoint) bool {
	return slices.EqualFunc(a, b, func(p, q gridPoint) bool { return p.omega == q.omega })
}

// step solves at a reference and finds the next.
func (x *exchanger) step(ref []gridPoint) (*solution, error) {
	c := through(ref)
	all := alternating(x.extrema(c, ref))
	d := &solution{curve: c, ref: ref, spread: math.Inf(1)}
	for _, e := range all {
		d.peak = math.Max(d.peak, math.Abs(e.height))
	}
	need := len(ref)
	if !(math.Abs(c.delta) <= math.MaxFloat64) {
		return d, fmt.Errorf("%w: no deviation solves the reference", errStuck)
	}
	if len(all) < need {
		return d, fmt.Errorf("%w: %d extrema found where %d are needed", errStuck, len(all), need)
	}
	all = strongest(all, need)
	d.next = make([]gridPoint, need)
	lowest := math.Inf(1)
	for i, e := range all {
		d.next[i] = e.gridPoint
		lowest = math.Min(lowest, math.Abs(e.height))
	}
	d.spread = (d.peak - lowest) / d.peak
	return d, nil
}

// explain adds what to do. A deviation 240 dB under the gains is rounding, and
// an exchange fails on it in many ways.
func (x *exchanger) explain(err error, d *solution) error {
	easy := x.spec.longestUseful()
	switch {
	case float64(x.spec.Taps) > easy:
		return fmt.Errorf("%w: about %.0f taps already meet these bands to %d dB; take fewer taps, or narrow the transitions", errTooEasy, easy, drowned)
	case x.drowns(d):
		return fmt.Errorf("%w: fewer taps meet these bands to %d dB; take fewer taps, or narrow the transitions", errTooEasy, drowned)
	}
	return fmt.Errorf("%w; use fewer taps, make the transitions more alike, bring the weights closer together, or use the family kaiser", err)
}

// drowns tells whether the error is nowhere above rounding.
func (x *exchanger) drowns(d *solution) bool {
	weight := 0.0
	for _, b := range x.spec.Bands {
		weight = math.Max(weight, b.Weight)
	}
	return d.peak < fromDB(-drowned)*weight*x.spec.highest()
}

// drowned is the attenuation in dB beyond which a design is rounding.
const drowned = 240

// longestUseful is about how many taps reach that attenuation, by the formula
// of Kaiser (1974) for equiripple filters as Rabiner & Gold (Theory and
// Application of Digital Signal Processing, 1975, section 3.11) give it:
// taps - 1 = (A - 13)/(14.6 width). Infinite without transitions.
func (s BandSpec) longestUseful() float64 {
	width := math.Inf(1)
	for i := 1; i < len(s.Bands); i++ {
		width = math.Min(width, (s.Bands[i].From-s.Bands[i-1].To)/s.Rate)
	}
	if math.IsInf(width, 1) {
		return width
	}
	return 1 + (drowned-13)/(14.6*width)
}
