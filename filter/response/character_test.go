package response

import (
	"math"
	"math/cmplx"
	"math/rand/v2"
	"testing"
)

// The zeros of filter kernels from a text on minimum phase: zeros at 0.5 and
// 0.8 e^(+-j), none, one or all of them reflected (figures recomputed; the
// group delays and energies are those of reference tables on minimum phase).
func TestCharacterOfReflectedZeros(t *testing.T) {
	kernel := func(real1, r, angle float64) []float64 {
		a := []float64{1, -real1}
		b := []float64{1, -2 * r * math.Cos(angle), r * r}
		return []float64{a[0], b[1] + a[1], b[2] + a[1]*b[1], a[1] * b[2]}
	}
	for _, c := range []struct {
		taps            []float64
		inside, outside int
		phase           string
	}{
		{kernel(0.5, 0.8, 1), 3, 0, "minimum"},
		{kernel(2, 0.8, 1), 2, 1, "mixed"},
		{kernel(2, 1.25, 1), 0, 3, "maximum"},
		{[]float64{1, 0.5}, 1, 0, "minimum"},
		{[]float64{0, 1}, 0, 1, "maximum"},
		{[]float64{1}, 0, 0, "linear"},
	} {
		got := System{Taps: c.taps}.Character(1e-12)
		if got.Inside != c.inside || got.Outside != c.outside || got.On != 0 || got.Phase() != c.phase || !got.Causal || got.Margin != 1 {
			t.Errorf("%v: %+v, %s; want %d inside, %d outside, %s", c.taps, got, got.Phase(), c.inside, c.outside, c.phase)
		}
	}
}

// The four types' check vectors and their forced zeros, at z = 1 and -1
// (Oppenheim and Schafer, section on generalised linear phase).
func TestCharacterOfTheFourTypes(t *testing.T) {
	for _, c := range []struct {
		taps []float64
		kind Kind
		on   int
	}{
		{[]float64{1, 2, 5, 2, 1}, TypeI, 0},
		{[]float64{1, 2, 2, 1}, TypeII, 3}, // -1 and two more: (1 + x)(1 + x + x^2)
		{[]float64{1, 2, 0, -2, -1}, TypeIII, 4},
		{[]float64{1, 2, -2, -1}, TypeIV, 1},
	} {
		got := System{Taps: c.taps}.Character(0)
		if got.Linear != c.kind || got.On != c.on || got.Inside != got.Outside || got.Inside+got.On+got.Outside != len(c.taps)-1 {
			t.Errorf("%v: %+v, want %v with %d zeros on the circle", c.taps, got, c.kind, c.on)
		}
	}
}

// A recursive filter is never linear-phase, and its margin is its poles'.
func TestCharacterOfSections(t *testing.T) {
	s := Section{B0: 1, B1: -2, B2: 1, A1: -1.8, A2: 0.81} // double zero at 1, poles at 0.9
	got := System{Sections: []Section{s}}.Character(0)
	if got.Linear != None || got.On != 2 || !(math.Abs(got.Margin-0.1) <= 1e-7) || got.Phase() != "minimum" {
		t.Errorf("%+v", got)
	}
	both := System{Zero: []Section{{B0: 1, B1: -0.5, A1: -0.3}}}.Character(0)
	if both.Causal || both.Linear != TypeI || both.Inside != 1 || both.Outside != 1 {
		t.Errorf("run both ways: %+v", both)
	}
	if want := "linear phase of type I, poles 0.7 inside the unit circle, not causal"; both.String() != want {
		t.Errorf("%q, want %q", both, want)
	}
}

// A long kernel: as many zeros as taps less one, counted by turning.
func TestCharacterOfLongKernel(t *testing.T) {
	h := make([]float64, 2001) // 1 - 0.5 x^2000: all zeros inside, at 0.5^(1/2000)
	h[0], h[2000] = 1, -0.5
	got := System{Taps: h}.Character(0)
	if got.Inside != 2000 || got.On != 0 || got.Outside != 0 {
		t.Errorf("%+v, want 2000 zeros inside", got)
	}
}

// Kernels made from random zeros, one pair of them very near to the circles that the
// count goes round: on every circle it finds what the moduli say. (Zeros that crowd
// together move when a polynomial's coefficients are rounded.)
func TestTurnsWithin(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 6))
	for range 200 {
		taps, moduli := []float64{1}, []float64{}
		for i := range 1 + rng.IntN(6) {
			r, angle := 0.5+rng.Float64(), math.Pi*rng.Float64()
			if i == 0 {
				r = 1 + 1e-5*rng.NormFloat64()
			}
			taps = times(taps, 1, -2*r*math.Cos(angle), r*r)
			moduli = append(moduli, r, r)
		}
		for _, radius := range []float64{1 - 3e-5, 1, 1 + 3e-5, 0.7} {
			want := 0
			for _, r := range moduli {
				if 1/r < radius {
					want++
				}
			}
			if got := turnsWithin(taps, radius); got != want {
				t.Errorf("zeros of moduli %v: %d within %g, want %d", moduli, got, radius, want)
			}
		}
	}
}

// times is the product of polynomials.
func times(x []float64, by ...float64) []float64 {
	out := make([]float64, len(x)+len(by)-1)
	for i, v := range x {
		for j, w := range by {
			out[i+j] += v * w
		}
	}
	return out
}

// A quarter more or less is told from each other on and beside the axes.
func TestQuarters(t *testing.T) {
	for angle := 0; angle < 360; angle += 15 {
		for turn := -75; turn <= 75; turn += 15 {
			a := cmplx.Rect(1, math.Pi/180*(float64(angle)+7))
			b := cmplx.Rect(1, math.Pi/180*float64(angle+turn+7))
			want := int(math.Floor(float64(angle+turn+7)/90)) - int(math.Floor(float64(angle+7)/90))
			if got := passed(nil, a, b, 0, 1); got != want {
				t.Errorf("from %d by %d degrees: %d quarters, want %d", angle+7, turn, got, want)
			}
		}
	}
	for want, c := range []complex128{1, 1i, -1, -1i} {
		if got := quarter(c); got != want {
			t.Errorf("%v begins quarter %d, want %d", c, got, want)
		}
	}
}
