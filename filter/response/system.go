package response

import (
	"math"
	"math/cmplx"
)

// System is a kernel, a cascade, and a cascade that runs forward and backward
// in time, one after another. Nil taps stand for a kernel of the one tap 1.
// With Zero sections the system is not causal.
type System struct {
	Taps     []float64
	Sections []Section
	Zero     []Section // response |H|^2, with no phase and no delay
}

// Spectrum gives H at omega = 2 pi k/size, k = 0 to size/2: the kernel's
// discrete transform times the sections' own formula. size is a power of two,
// at least len(Taps).
func (s System) Spectrum(size int) []complex128 {
	h := make([]complex128, size/2+1)
	for k := range h {
		h[k] = 1
	}
	if s.Taps != nil {
		h = Spectrum(s.Taps, size)
	}
	if len(s.Sections) > 0 || len(s.Zero) > 0 {
		for k := range h {
			h[k] *= s.recursiveAt(2 * math.Pi * float64(k) / float64(size))
		}
	}
	return h
}

// recursiveAt is H without the kernel.
func (s System) recursiveAt(omega float64) complex128 {
	return SectionsAt(s.Sections, omega) * complex(power(SectionsAt(s.Zero, omega)), 0)
}

// At is H at omega radians a sample, summed directly.
func (s System) At(omega float64) complex128 {
	h := s.recursiveAt(omega)
	if s.Taps != nil {
		h *= TapsAt(s.Taps, omega)
	}
	return h
}

// GroupDelay gives the group delay in samples on the grid of Spectrum: by
// Re{DFT(n h)/DFT(h)} for the kernel, NaN where that is not stated, plus the
// sections' own formula.
func (s System) GroupDelay(size int) []float64 {
	tau := make([]float64, size/2+1)
	if s.Taps != nil {
		tau = TapsGroupDelay(s.Taps, size)
	}
	if len(s.Sections) > 0 {
		for k := range tau {
			tau[k] += SectionsGroupDelay(s.Sections, 2*math.Pi*float64(k)/float64(size))
		}
	}
	return tau
}

// PhaseDelay gives -arg H/omega in samples on the grid of Spectrum, the phase
// unwrapped from the lowest bin that is stated, where it is taken between -pi
// and pi: for a system whose phase there is 0, as that of every low-pass of
// positive gain is at 0 Hz, it is the delay of a steady tone. NaN at 0 Hz and
// where |H| is more than 60 dB under its maximum. size must be at least 8 times
// the kernel's length, so that no turn is missed between two bins.
func (s System) PhaseDelay(size int) []float64 {
	h := s.Spectrum(size)
	least := Stated * maxModulus(h)
	out := make([]float64, len(h))
	phase, last := 0.0, complex(1, 0)
	for k, v := range h {
		out[k] = math.NaN()
		if modulus := cmplx.Abs(v); !(modulus > 0 && modulus >= least) {
			continue
		}
		phase += cmplx.Phase(v * cmplx.Conj(last))
		last = v
		if k > 0 {
			out[k] = -phase / (2 * math.Pi * float64(k) / float64(size))
		}
	}
	return out
}
