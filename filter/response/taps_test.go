package response

import (
	"math"
	"math/cmplx"
	"math/rand/v2"
	"testing"
)

// TestForcedZeros: the zeros that the linear-phase types cannot avoid
// (Oppenheim & Schafer, table of the four types).
func TestForcedZeros(t *testing.T) {
	cases := []struct {
		taps        []float64
		atOne, atPi float64
	}{
		{[]float64{1, 2, 2, 1}, 6, 0},
		{[]float64{1, 2, 0, -2, -1}, 0, 0},
		{[]float64{1, 2, -2, -1}, 0, -2},
	}
	for _, c := range cases {
		near(t, "H(1)", real(TapsAt(c.taps, 0)), c.atOne, 1e-15)
		near(t, "H(-1)", real(TapsAt(c.taps, math.Pi)), c.atPi, 1e-14)
	}
}

// TestSpectrum compares two roads, the transform and Horner's rule; both err
// by rounding times the sum of |h|.
func TestSpectrum(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 2))
	taps := make([]float64, 300)
	for i := range taps {
		taps[i] = rng.Float64() - 0.5
	}
	const k = 1024
	spectrum := Spectrum(taps, k)
	if len(spectrum) != k/2+1 {
		t.Fatalf("%d bins, want %d", len(spectrum), k/2+1)
	}
	for i, h := range spectrum {
		near(t, "bin", cmplx.Abs(h-TapsAt(taps, 2*math.Pi*float64(i)/k)), 0, 300*300*1e-16)
	}
}

// TestTapsAtEach: not a bit of difference, an odd number of frequencies included.
func TestTapsAtEach(t *testing.T) {
	taps, omegas := noise(4, 777), []float64{0, 0.1, 1, 2, 3, -1, math.Pi}
	got := make([]complex128, len(omegas))
	TapsAtEach(got, taps, omegas)
	for i, omega := range omegas {
		if want := TapsAt(taps, omega); got[i] != want {
			t.Errorf("at %g: %v, want %v", omega, got[i], want)
		}
	}
}

// TestTapsGroupDelay: a pure delay is exact in every bin, a symmetric kernel of
// N taps gives (N-1)/2, one pole agrees with the analytic sum, and a zero on
// the circle is not stated there but is stated elsewhere.
func TestTapsGroupDelay(t *testing.T) {
	impulse := make([]float64, 2000)
	impulse[1000] = 1
	for _, d := range TapsGroupDelay(impulse, 2048) {
		near(t, "pure delay", d, 1000, 1e-9)
	}
	for _, d := range TapsGroupDelay([]float64{1, 2, 5, 2, 1}, 64) {
		near(t, "symmetric", d, 2, 1e-12)
	}
	pole := []Section{{B0: 1, A1: -0.9}}
	for i, d := range TapsGroupDelay(Impulse(pole, 500), 1024) {
		near(t, "one pole", d, SectionsGroupDelay(pole, 2*math.Pi*float64(i)/1024), 1e-10)
	}
	for i, d := range TapsGroupDelay([]float64{1, 0, 1}, 64) {
		if i == 16 {
			if !math.IsNaN(d) {
				t.Errorf("at the zero: %g, want not stated", d)
			}
			continue
		}
		near(t, "beside the zero", d, 1, 1e-12)
	}
	for _, d := range TapsGroupDelay([]float64{0, 0}, 4) {
		if !math.IsNaN(d) {
			t.Errorf("no taps, yet a delay of %g", d)
		}
	}
}

// TestCascadeOfOrder24 measures a cascade of twelve sections both ways; an
// expanded polynomial of this order has no digits left.
func TestCascadeOfOrder24(t *testing.T) {
	var s []Section
	for i := range 12 {
		angle := 0.2 + 0.01*float64(i)
		r := 0.9 + 0.005*float64(i)
		s = append(s, Section{B0: 0.01, B1: 0.02, B2: 0.01, A1: -2 * r * math.Cos(angle), A2: r * r})
	}
	const k = 1 << 13
	stated := 0
	for i, d := range TapsGroupDelay(Impulse(s, 4000), k) {
		if !math.IsNaN(d) {
			stated++
			near(t, "sum of sections", d, SectionsGroupDelay(s, 2*math.Pi*float64(i)/k), 1e-8)
		}
	}
	if stated < 100 {
		t.Errorf("only %d bins compared", stated)
	}
}

func TestNextPow2(t *testing.T) {
	for n, want := range map[int]int{-3: 1, 0: 1, 1: 1, 2: 2, 3: 4, 4: 4, 5: 8, 1023: 1024, 1024: 1024, 1025: 2048} {
		if got := NextPow2(n); got != want {
			t.Errorf("NextPow2(%d) = %d, want %d", n, got, want)
		}
	}
}

func TestSpectrumPanics(t *testing.T) {
	for _, k := range []int{0, 1, 3, 7, 4} {
		func() {
			defer func() {
				if recover() == nil {
					t.Errorf("length %d was accepted for 5 taps", k)
				}
			}()
			Spectrum(make([]float64, 5), k)
		}()
	}
}
