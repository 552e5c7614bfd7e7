package response

import (
	"math"
	"math/cmplx"
	"testing"
)

// A delay of 7 samples and a symmetric kernel of 5 taps delay every tone by 7
// and by 2 samples, phase and group alike (Oppenheim and Schafer, generalised
// linear phase).
func TestPhaseDelayOfLinearPhase(t *testing.T) {
	for want, taps := range map[float64][]float64{7: {7: 1}, 2: {1, 2, 3, 2, 1}} {
		s := System{Taps: taps}
		phase, group := s.PhaseDelay(256), s.GroupDelay(256)
		for k := 1; k < 80; k++ { // the five taps have zeros at bin 85
			if !(math.Abs(phase[k]-want) <= 1e-9) || !(math.Abs(group[k]-want) <= 1e-9) {
				t.Fatalf("bin %d: phase delay %g, group delay %g, want %g", k, phase[k], group[k], want)
			}
		}
		if !math.IsNaN(phase[0]) {
			t.Errorf("a phase delay of %g at 0 Hz", phase[0])
		}
	}
}

// A first-order all-pass (c + 1/z)/(1 + c/z) has the phase
// -w + 2 atan(c sin w/(1 + c cos w)) (Oppenheim and Schafer, all-pass systems).
func TestPhaseDelayOfAllPass(t *testing.T) {
	const c, size = -0.5, 1024
	got := System{Sections: []Section{{B0: c, B1: 1, A1: c}}}.PhaseDelay(size)
	for k := 1; k < size/2; k++ {
		w := 2 * math.Pi * float64(k) / size
		want := (w - 2*math.Atan(c*math.Sin(w)/(1+c*math.Cos(w)))) / w
		if !(math.Abs(got[k]-want) <= 1e-9) {
			t.Fatalf("bin %d: %g, want %g", k, got[k], want)
		}
	}
}

// The parts of a system multiply, and a section run both ways adds no phase.
func TestSystemIsTheProductOfItsParts(t *testing.T) {
	taps, one, both := []float64{1, -0.5, 0.25}, Section{B0: 1, A1: -0.3}, Section{B0: 0.5, B1: 0.5, A1: -0.2}
	s := System{Taps: taps, Sections: []Section{one}, Zero: []Section{both}}
	const size = 512
	h, tau := s.Spectrum(size), s.GroupDelay(size)
	kernel := TapsGroupDelay(taps, size)
	for k := range h {
		w := 2 * math.Pi * float64(k) / size
		z := cmplx.Abs(SectionsAt([]Section{both}, w))
		want := TapsAt(taps, w) * SectionsAt([]Section{one}, w) * complex(z*z, 0)
		if !(cmplx.Abs(h[k]-want) <= 1e-13) || !(cmplx.Abs(s.At(w)-want) <= 1e-13) {
			t.Fatalf("bin %d: %v and %v, want %v", k, h[k], s.At(w), want)
		}
		if d := tau[k] - kernel[k] - SectionsGroupDelay([]Section{one}, w); !(math.Abs(d) <= 1e-12) {
			t.Fatalf("bin %d: group delay off by %g", k, d)
		}
	}
}

// The ways to read a system on a grid agree, with and without each of its parts.
func TestGridsOfASystem(t *testing.T) {
	taps, one, both := noise(2, 50), []Section{{B0: 1, A1: -0.3}, {B0: 1, B1: 0.5, B2: 0.8, A1: 0.2, A2: 0.4}}, []Section{{B0: 0.5, B1: 0.5, A1: -0.2}}
	const size = 4096
	for _, s := range []System{{}, {Taps: taps}, {Sections: one}, {Zero: both}, {Taps: taps, Sections: one, Zero: both}} {
		h, tau, magnitude := s.Spectrum(size), s.GroupDelay(size), s.Magnitude(size)
		s.EachBin(size, func(k int, squared, delay float64) {
			want := cmplx.Abs(h[k])
			// Relative to the kernel's sum of moduli, about 40.
			if !(math.Abs(magnitude[k]-want) <= 1e-13) || !(math.Abs(math.Sqrt(squared)-want) <= 1e-13) {
				t.Fatalf("%+v, bin %d: |H| %g and %g, want %g", s, k, magnitude[k], math.Sqrt(squared), want)
			}
			if delay != tau[k] && !(math.IsNaN(delay) && math.IsNaN(tau[k])) {
				t.Fatalf("%+v, bin %d: delay %g, want %g", s, k, delay, tau[k])
			}
		})
	}
}

func TestSectionsMagnitude(t *testing.T) {
	s := []Section{{B0: 1, B1: -1.99, B2: 1, A1: -1.98, A2: 0.985}, {B0: 0.1, B1: 0.1, A1: -0.8}}
	for omega := 0.0; omega <= math.Pi; omega += math.Pi / 999 {
		want := cmplx.Abs(SectionsAt(s, omega))
		near(t, "|H|", SectionsMagnitude(s, omega), want, 1e-14*want+1e-16)
	}
}
