package design

import (
	"math"
	"math/cmplx"
	"testing"

	"fettle/filter/response"
)

// firFixture is testdata/fir.json; see fir.py for what made it.
type firFixture struct {
	Windows, Sincs, Sampled, Squares, Equiripple []firCase
}

type firCase struct {
	Window, Kind  string
	N, Points     int
	Antisymmetric bool
	Scale         bool
	Parameter     float64
	Rate          float64
	Edges         []float64
	Hz, Gain      []float64
	Bands         []Band
	Source        string
	Taps, Taps16  []float64
	Deviation     float64
}

func (c firCase) spec() BandSpec {
	return BandSpec{Taps: c.N, Antisymmetric: c.Antisymmetric, Rate: c.Rate, Bands: c.Bands}
}

var loadFIR = fixtureFile[firFixture]("fir.json")

// worstTap returns the largest difference between kernels of one length.
func worstTap(t *testing.T, got, want []float64) float64 {
	t.Helper()
	if len(got) != len(want) {
		t.Fatalf("%d taps, want %d", len(got), len(want))
	}
	worst := 0.0
	for i := range got {
		if d := math.Abs(got[i] - want[i]); !(d <= worst) {
			worst = d
		}
	}
	return worst
}

// amplitudeAt is the real amplitude of a linear-phase kernel, as BandSpec
// defines it.
func amplitudeAt(taps []float64, antisymmetric bool, omega float64) float64 {
	return turned(response.TapsAt(taps, omega), len(taps), antisymmetric, omega)
}

func turned(h complex128, n int, antisymmetric bool, omega float64) float64 {
	h *= cmplx.Rect(1, omega*float64(n-1)/2)
	if antisymmetric {
		return imag(h)
	}
	return real(h)
}

// ripple is a local extreme of the weighted deviation from the bands.
type ripple struct{ hz, height float64 }

// ripplesOf reads a kernel on a grid of at least 64 points to a ripple and on
// the edges, and narrows each extreme down between its neighbours.
func ripplesOf(s BandSpec, taps []float64) []ripple {
	k := response.NextPow2(128 * len(taps))
	spectrum := response.Spectrum(taps, k)
	var all []ripple
	for _, b := range s.Bands {
		off := func(hz, amplitude float64) ripple { return ripple{hz, b.Weight * (amplitude - b.gainAt(hz))} }
		at := func(hz float64) ripple { return off(hz, amplitudeAt(taps, s.Antisymmetric, s.radians(hz))) }
		points := []ripple{at(b.From)}
		for i, h := range spectrum {
			if hz := float64(i) / float64(k) * s.Rate; hz > b.From && hz < b.To {
				points = append(points, off(hz, turned(h, len(taps), s.Antisymmetric, s.radians(hz))))
			}
		}
		all = append(all, localExtremes(append(points, at(b.To)), at)...)
	}
	return all
}

func localExtremes(points []ripple, at func(hz float64) ripple) []ripple {
	var all []ripple
	last := len(points) - 1
	for i, p := range points {
		left, right := points[max(i-1, 0)], points[min(i+1, last)]
		sign := math.Copysign(1, p.height)
		if sign*(p.height-left.height) >= 0 && sign*(p.height-right.height) >= 0 {
			all = append(all, narrowed(left.hz, right.hz, sign, at))
		}
	}
	return all
}

// narrowed is a golden-section search for the greatest height times sign.
func narrowed(lo, hi, sign float64, at func(hz float64) ripple) ripple {
	const ratio = 0.6180339887498949
	best := at(lo)
	for range 20 {
		a, b := at(hi-ratio*(hi-lo)), at(lo+ratio*(hi-lo))
		if sign*a.height > sign*b.height {
			hi, b = b.hz, a
		} else {
			lo = a.hz
		}
		if sign*b.height > sign*best.height {
			best = b
		}
	}
	if end := at(hi); sign*end.height > sign*best.height {
		best = end
	}
	return best
}

func highest(all []ripple) float64 {
	top := 0.0
	for _, r := range all {
		if h := math.Abs(r.height); !(h <= top) {
			top = h
		}
	}
	return top
}

// alternations counts the ripples that reach the height, sign after sign, and
// returns how far the least of them is below the highest, relatively.
func alternations(all []ripple, within float64) (count int, spread float64) {
	top := highest(all)
	last := 0.0
	for _, r := range all {
		short := 1 - math.Abs(r.height)/top
		if short <= within && r.height*last <= 0 {
			count++
			last = r.height
			spread = math.Max(spread, short)
		}
	}
	return count, spread
}
