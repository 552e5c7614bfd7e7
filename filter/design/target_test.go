package design

import (
	"math"
	"testing"

	"fettle/filter/response"
)

// A grid keeps what its target says, whatever it leaves out of memory: bounds that are
// equal up to some point and then part, tolerances that change there.
func TestGridKeepsItsTarget(t *testing.T) {
	const size, parts = 64, 11
	levels := map[string]func(k int) Level{
		"a curve":                func(k int) Level { return Level{Aim: 1, Low: float64(k), High: float64(k), Allow: 0.1} },
		"bounds":                 func(k int) Level { return Level{Aim: 1, High: float64(k), Allow: 0.1} },
		"bounds from somewhere":  func(k int) Level { return Level{Low: float64(min(k, parts)), High: float64(k), Allow: 0.1} },
		"tolerances that change": func(k int) Level { return Level{Low: 1, High: 1, Allow: 0.1 * float64(1+max(k, parts))} },
	}
	for name, level := range levels {
		aims := make([]float64, size/2+1)
		target := Target{
			Grid:   func(int) func(int) Level { return level },
			At:     func(omega float64) Level { return level(int(omega)) },
			Points: []float64{100, 200},
		}
		g := target.sample(size, aims)
		top := 0.0
		for i := range g.high {
			k := i
			if i > size/2 {
				k = int(target.Points[i-size/2-1])
			}
			want := level(k)
			top = math.Max(top, want.High)
			got := g.bounds(i)
			if got.high != want.High || got.low != want.Low || got.allow != fromDB(want.Allow)-1 {
				t.Errorf("%s, point %d: %+v, want %+v", name, i, got, want)
			}
			if i <= size/2 && aims[i] != want.Aim {
				t.Errorf("%s, point %d: aim %g, want %g", name, i, aims[i], want.Aim)
			}
		}
		near(t, name+", floor", g.floor, top*1e-4, 1e-12*top)
	}
}

// Errors and excess by hand: bounds 0.5 and 2 with a tolerance of a tenth of each and a
// floor of 0.01.
func TestBoundsByHand(t *testing.T) {
	b := bounds{high: 2, low: 0.5, allow: 0.1, floor: 0.01}
	for _, c := range []struct{ m, excess, strayed float64 }{
		{1, 0, 0}, {2, 0, 0}, {0.5, 0, 0},
		{2.21, 1, 0.1}, {2.005, 0.005 / 0.21, 0}, {0.44, 1, 0.1}, {0.495, 0.005 / 0.06, 0},
	} {
		near(t, "excess", b.excess(c.m), c.excess, 1e-12)
		near(t, "strayed", b.strayed(c.m), c.strayed, 1e-12)
	}
	if !math.IsNaN(b.excess(math.NaN())) || !math.IsNaN(b.strayed(math.NaN())) {
		t.Error("a magnitude that is no number counts as a number")
	}
	if !math.IsInf(bounds{floor: 0.01}.strayed(1), 1) {
		t.Error("no tolerance meets a target of 0 that is missed by more than the floor")
	}
}

// A magnitude that is no number fails a grid wherever it stands.
func TestGridFailsNaN(t *testing.T) {
	g := flatTarget().Sample(64)
	for _, at := range []int{0, 7, 32} {
		m := Magnitude{Bin: func(k int) float64 {
			if k == at {
				return math.NaN()
			}
			return 1.5
		}}
		if g.Met(m) || !math.IsInf(g.Excess(m), 1) || !math.IsNaN(g.ErrorDB(m)) {
			t.Errorf("NaN at bin %d: excess %g, error %g dB", at, g.Excess(m), g.ErrorDB(m))
		}
	}
}

// Compared bin by bin as it is transformed, a kernel strays from another by what a grid
// says.
func TestMagnitudeErrors(t *testing.T) {
	wanted, err := WindowedSinc(Lowpass, 301, KaiserBeta(60), true, 48000, 8000)
	noError(t, err)
	got := append([]float64(nil), wanted...)
	got[140] += 0.003
	const size, tol = 1 << 13, 0.1
	reached := response.System{Taps: got}.Magnitude(size)
	magnitude := response.System{Taps: wanted}.Magnitude(size)
	target := Target{Grid: func(int) func(int) Level {
		return func(k int) Level {
			return Level{Aim: magnitude[k], Low: magnitude[k], High: magnitude[k], Allow: tol}
		}
	}}
	g, at := target.Sample(size), Magnitude{Bin: func(k int) float64 { return reached[k] }}
	excess, db := magnitudeErrors(wanted, got, tol, size)
	near(t, "excess", excess, g.Excess(at), 1e-9)
	near(t, "error in dB", db, g.ErrorDB(at), 1e-9)
	if !(excess > 1e-3 && db > 1e-3) {
		t.Errorf("excess %g, %g dB: too little to tell", excess, db)
	}
}
