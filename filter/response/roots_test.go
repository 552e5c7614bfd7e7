package response

import (
	"math"
	"math/cmplx"
	"testing"
)

func TestRoots(t *testing.T) {
	cases := []struct {
		name  string
		s     Section
		zeros []complex128
		poles []complex128
	}{
		{"second order", Section{B0: 2, B1: -2, B2: 4, A1: -1, A2: 0.5},
			[]complex128{complex(0.5, math.Sqrt(7)/2), complex(0.5, -math.Sqrt(7)/2)}, []complex128{0.5 + 0.5i, 0.5 - 0.5i}},
		{"first order", Section{B0: 1, B1: -1, A1: -0.75}, []complex128{1}, []complex128{0.75}},
		{"zero at infinity", Section{B1: 1, B2: 0.5, A1: -1, A2: 0.25}, []complex128{-0.5}, []complex128{0.5, 0.5}},
		{"only poles", Section{B0: 1, A1: 0, A2: 0.25}, []complex128{0, 0}, []complex128{0.5i, -0.5i}},
		{"opposite reals", Section{B0: 1, B2: -1, A1: 0, A2: -0.25}, []complex128{-1, 1}, []complex128{-0.5, 0.5}},
		{"far apart reals", Section{B0: 1, B1: -1e8, B2: 1, A1: 0.5, A2: 0}, []complex128{1e8, 1e-8}, []complex128{-0.5, 0}},
	}
	for _, c := range cases {
		compareRoots(t, c.name+" zeros", c.s.Zeros(), c.zeros)
		compareRoots(t, c.name+" poles", c.s.Poles(), c.poles)
	}
}

// compareRoots allows a few units in the last place of each root.
func compareRoots(t *testing.T, name string, got, want []complex128) {
	t.Helper()
	if len(got) != len(want) {
		t.Errorf("%s: got %v, want %v", name, got, want)
		return
	}
	for i := range got {
		if !(cmplx.Abs(got[i]-want[i]) <= 1e-15*cmplx.Abs(want[i])) {
			t.Errorf("%s: got %v, want %v", name, got, want)
		}
	}
}

func TestStability(t *testing.T) {
	cases := []struct {
		name   string
		a1, a2 float64
		stable bool
		radius float64
	}{
		{"inside", -1.8, 0.81, true, 0.9},
		{"integrator", -1, 0, false, 1},
		{"resonator on the circle", -1, 1, false, 1},
		{"real pole outside", -2.5, 1, false, 2},
		{"pole beyond -1", 1.2, 0.1, false, 1.1099019513592784},
		{"NaN", math.NaN(), 0.5, false, math.NaN()},
	}
	for _, c := range cases {
		s := []Section{{B0: 1}, {B0: 1, A1: c.a1, A2: c.a2}}
		if Stable(s) != c.stable {
			t.Errorf("%s: stable is %v", c.name, !c.stable)
		}
		if r := MaxPoleRadius(s); !math.IsNaN(c.radius) {
			near(t, c.name, r, c.radius, 1e-8) // a double pole is known to the root of the precision
		}
	}
	if !Stable(nil) || MaxPoleRadius(nil) != 0 {
		t.Error("the identity has no poles")
	}
}

func TestSymmetry(t *testing.T) {
	cases := []struct {
		taps []float64
		tol  float64
		want Kind
		name string
	}{
		{[]float64{1, 2, 1}, 0, TypeI, "type I"},
		{[]float64{1, 2, 2, 1}, 0, TypeII, "type II"},
		{[]float64{1, 2, 0, -2, -1}, 0, TypeIII, "type III"},
		{[]float64{1, 2, -2, -1}, 0, TypeIV, "type IV"},
		{[]float64{1, 2, 3}, 0, None, "none"},
		{[]float64{1, 2, 1 + 1e-10}, 1e-9, TypeI, "type I"},
		{[]float64{1, 2, 1 + 1e-10}, 1e-12, None, "none"},
		{[]float64{0, 0}, 0, None, "none"},
		{nil, 0, None, "none"},
		{[]float64{1, math.NaN(), 1}, 1, None, "none"},
	}
	for _, c := range cases {
		got := Symmetry(c.taps, c.tol)
		if got != c.want || got.String() != c.name {
			t.Errorf("%v: got %v, want %v", c.taps, got, c.want)
		}
		if got.Symmetric() != (c.want == TypeI || c.want == TypeII) || got.Antisymmetric() != (c.want == TypeIII || c.want == TypeIV) {
			t.Errorf("%v: symmetric %v, antisymmetric %v", got, got.Symmetric(), got.Antisymmetric())
		}
	}
}
