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

// Magnitude gives |H| on the grid of Spectrum.
func (s System) Magnitude(size int) []float64 {
	out := make([]float64, size/2+1)
	if s.Taps == nil {
		for k := range out {
			out[k] = 1
		}
	} else {
		NewTransform(size, len(s.Taps)).Each(func(k int, v []complex128) { out[k] = math.Sqrt(power(v[0])) }, Sequence{X: s.Taps})
	}
	if len(s.Sections) > 0 || len(s.Zero) > 0 {
		for k := range out {
			omega := 2 * math.Pi * float64(k) / float64(size)
			both, _ := squareAndDelay(s.Zero, omega)
			out[k] *= SectionsMagnitude(s.Sections, omega) * both
		}
	}
	return out
}

// GroupDelay gives the group delay in samples on the grid of Spectrum: by
// Re{DFT(n h)/DFT(h)} for the kernel, NaN where that is not stated, plus the
// sections' own formula.
func (s System) GroupDelay(size int) []float64 {
	tau := make([]float64, size/2+1)
	s.EachBin(size, func(k int, _, delay float64) { tau[k] = delay })
	return tau
}

// EachBin visits the grid of Spectrum in no order that matters, with |H|^2 and the
// delay of GroupDelay.
func (s System) EachBin(size int, visit func(k int, squared, delay float64)) {
	whole := func(k int, squared, delay float64) {
		omega := 2 * math.Pi * float64(k) / float64(size)
		once, late := squareAndDelay(s.Sections, omega)
		both, _ := squareAndDelay(s.Zero, omega)
		visit(k, squared*once*both*both, delay+late)
	}
	if s.Taps != nil {
		eachTapsBin(s.Taps, size, whole)
		return
	}
	for k := range size/2 + 1 {
		whole(k, 1, 0)
	}
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
