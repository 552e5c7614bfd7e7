package response

import (
	"math"
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
