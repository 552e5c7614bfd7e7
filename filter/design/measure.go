package design

import (
	"math"
	"math/cmplx"

	"fettle/filter/response"
)

// Measured is what a filter reaches against a mask.
type Measured struct {
	RippleDB    float64 // largest |20 log10 |H|| in the passband
	RejectDB    float64 // least attenuation in the stopband
	OvershootDB float64 // largest gain in the transitions, -Inf if none
}

// Meets reports whether the figures satisfy the mask.
func (got Measured) Meets(m Mask) bool {
	return got.RippleDB <= m.RippleDB && got.RejectDB >= m.RejectDB && got.OvershootDB <= m.RippleDB
}

// tally collects extremes of magnitude by region.
type tally struct {
	mask                               Mask
	passMin, passMax, stopMax, overMax float64
}

func newTally(m Mask) *tally { return &tally{mask: m, passMin: math.Inf(1)} }

func (t *tally) add(hz, magnitude float64) {
	t.addIn(t.mask.regionAt(hz), magnitude)
}

func (t *tally) addIn(where region, magnitude float64) {
	switch where {
	case passband:
		t.passMin = math.Min(t.passMin, magnitude)
		t.passMax = math.Max(t.passMax, magnitude)
	case stopband:
		t.stopMax = math.Max(t.stopMax, magnitude)
	default:
		t.overMax = math.Max(t.overMax, magnitude)
	}
}

func (t *tally) measured() Measured {
	return Measured{
		RippleDB:    math.Max(toDB(t.passMax), -toDB(t.passMin)),
		RejectDB:    -toDB(t.stopMax),
		OvershootDB: toDB(t.overMax),
	}
}

// MeasureTaps measures a kernel against a valid mask on a grid of at least 16
// points to the width of one ripple (rate/taps), on the edges themselves, and
// at the vertices of parabolas laid through local extremes of the grid.
func MeasureTaps(taps []float64, m Mask) Measured {
	k := response.NextPow2(16 * max(len(taps), 64))
	magnitude := response.System{Taps: taps}.Magnitude(k)
	t := newTally(m)
	for i, h := range magnitude {
		where := m.regionAt(float64(i) * m.Rate / float64(k))
		t.addIn(where, h)
		if i > 0 && i+1 < len(magnitude) {
			t.addIn(where, vertex(magnitude[i-1], h, magnitude[i+1]))
		}
	}
	t.addEdges(func(omega float64) complex128 { return response.TapsAt(taps, omega) })
	return t.measured()
}

// vertex returns the extreme of the parabola through three equally spaced
// values if the middle one is a smooth extreme, else the middle one. A cusp at
// a zero of the magnitude is no parabola, and is a minimum of no consequence.
func vertex(left, middle, right float64) float64 {
	curvature := left - 2*middle + right
	extreme := (middle-left)*(middle-right) > 0
	if !extreme || curvature > 0 && math.Min(left, right) > 1.5*middle {
		return middle
	}
	slope := (right - left) / 2
	return middle - slope*slope/(2*curvature)
}

// MeasureSections measures a cascade against a valid mask: on 2^14 points
// spaced evenly and as many by octaves from 1e-5 of the rate up, on the edges,
// and beside every pole, where a narrow extreme may hide.
func MeasureSections(s []response.Section, m Mask) Measured {
	return tallySections(s, m).measured()
}

func tallySections(s []response.Section, m Mask) *tally {
	const points = 1 << 14
	t := newTally(m)
	at := func(omega float64) complex128 { return response.SectionsAt(s, omega) }
	for i := range points + 1 {
		part := float64(i) / points
		for _, omega := range [2]float64{math.Pi * part, math.Pi * math.Pow(2e-5, part)} {
			t.add(omega/(2*math.Pi)*m.Rate, cmplx.Abs(at(omega)))
		}
	}
	t.addNearPoles(s, at)
	t.addEdges(at)
	return t
}

func (t *tally) addNearPoles(s []response.Section, at func(float64) complex128) {
	for i := range s {
		for _, p := range s[i].Poles() {
			for step := -4.0; step <= 4; step += 1.0 / 16 {
				omega := cmplx.Phase(p) + step*(1-cmplx.Abs(p))
				if omega > 0 && omega < math.Pi {
					t.add(omega/(2*math.Pi)*t.mask.Rate, cmplx.Abs(at(omega)))
				}
			}
		}
	}
}

// addEdges reads each edge in its own band, whatever the rounding of the
// frequency.
func (t *tally) addEdges(at func(omega float64) complex128) {
	m := t.mask
	for i := range m.edges() {
		t.addIn(passband, cmplx.Abs(at(2*math.Pi*m.Pass[i]/m.Rate)))
		t.addIn(stopband, cmplx.Abs(at(2*math.Pi*m.Stop[i]/m.Rate)))
	}
}
