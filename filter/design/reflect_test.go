package design

import (
	"math"
	"math/cmplx"
	"testing"

	"fettle/filter/response"
)

// TestReflectSections: the magnitude is untouched, no zero is left outside,
// and each case lands on the taps known for it.
func TestReflectSections(t *testing.T) {
	cases := []struct {
		name string
		in   response.Section
		want [3]float64
	}{
		{"pair outside", response.Section{B0: 0.25, B1: -0.5, B2: 1, A1: -0.5}, [3]float64{1, -0.5, 0.25}},
		{"both reals outside", response.Section{B0: 1, B1: -5, B2: 6}, [3]float64{6, -5, 1}},
		{"both outside, product negative", response.Section{B0: 1, B1: -1, B2: -6, A1: 0.5}, [3]float64{6, 1, -1}},
		{"one outside", response.Section{B0: 1, B1: -2.5, B2: 1}, [3]float64{2, -2, 0.5}},
		{"first order", response.Section{B0: 1, B1: -2, A1: -0.9}, [3]float64{2, -1, 0}},
		{"first order, negative", response.Section{B0: -1, B1: -2}, [3]float64{-2, -1, 0}},
		{"inside", response.Section{B0: 1, B1: -0.5, B2: 0.06}, [3]float64{1, -0.5, 0.06}},
		{"on the circle", response.Section{B0: 1, B1: -1.2, B2: 1}, [3]float64{1, -1.2, 1}},
		{"double on the circle", response.Section{B0: 1, B1: -2, B2: 1}, [3]float64{1, -2, 1}},
		{"delay", response.Section{B2: 3}, [3]float64{3, 0, 0}},
		{"delay and zero outside", response.Section{B1: 1, B2: -4}, [3]float64{4, -1, 0}},
		{"silence", response.Section{}, [3]float64{0, 0, 0}},
		{"first-order all-pass", response.Section{B0: -0.5, B1: 1, A1: -0.5}, [3]float64{-1, 0.5, 0}},
	}
	for _, c := range cases {
		out, err := ReflectSections([]response.Section{c.in})
		noError(t, err)
		compareTaps(t, c.name, []float64{out[0].B0, out[0].B1, out[0].B2}, c.want[:], 1e-15)
		checkReflected(t, c.name, []response.Section{c.in}, out)
	}
	_, err := ReflectSections([]response.Section{{B0: 1}, {B0: 1, A1: -2.5, A2: 1}})
	wantError(t, err, "section 2 has a pole on or outside the unit circle (radius 2)")
}

func checkReflected(t *testing.T, name string, before, after []response.Section) {
	t.Helper()
	for i := range 101 {
		omega := math.Pi * float64(i) / 100
		want := cmplx.Abs(response.SectionsAt(before, omega))
		near(t, name, cmplx.Abs(response.SectionsAt(after, omega)), want, 1e-13*(1+want))
	}
	for _, s := range after {
		for _, z := range s.Zeros() {
			if !(cmplx.Abs(z) <= 1+1e-12) {
				t.Errorf("%s: a zero is left at radius %g", name, cmplx.Abs(z))
			}
		}
	}
}

// TestReflectAllPass: a cookbook all-pass becomes a gain of 1.
func TestReflectAllPass(t *testing.T) {
	s := section(t)(AllPass(48000, 1000, 0.7))
	out, err := ReflectSections([]response.Section{s})
	noError(t, err)
	for i := range 11 {
		h := response.SectionsAt(out, math.Pi*float64(i)/10)
		near(t, "all-pass", cmplx.Abs(h-1), 0, 1e-15)
	}
}

// TestReflectedButterworth: the classical families are minimum phase already.
func TestReflectedButterworth(t *testing.T) {
	f, err := Butterworth(Bandpass, 5, 48000, 100, 8000)
	noError(t, err)
	s := f.Sections()
	out, err := ReflectSections(s)
	noError(t, err)
	for i := range s {
		if s[i] != out[i] {
			t.Errorf("section %d changed: %v to %v", i, s[i], out[i])
		}
	}
}
