package response

import "math"

// SectionsAt returns the cascade's complex response at omega, 0..pi radians
// per sample (math.Pi stands for z = -1 exactly, and a zero there or at z = 1
// gives exactly 0). An empty cascade is the identity.
//
// Accuracy: numerator and denominator are expanded about z = 1 (left half:
// z = -1) with sums that are rounded once, so the relative error is a few
// 1e-16 a section times Q, for a 20 Hz corner at 384 kHz as for any other.
// What remains at low corners is the rounding of the coefficients themselves,
// which no evaluation can undo.
func SectionsAt(s []Section, omega float64) complex128 {
	p := pointAt(omega)
	h := complex(1, 0)
	for _, section := range s {
		h *= section.numerator().centred(p) / section.denominator().centred(p)
	}
	return h
}

// SectionsGroupDelay returns the cascade's group delay in samples at omega,
// 0..pi: the analytic sum over the sections' numerators and denominators
// (Oppenheim & Schafer, Discrete-Time Signal Processing, chapter on transform
// analysis). Next to poles and at low omega it has the accuracy stated at
// SectionsAt. A zero on the unit circle contributes the limit, the constant
// half a sample of its factor, so there is no spike at a notch; a pole on the
// circle (not a stable filter) likewise. A section of zero gain has no group
// delay: NaN.
func SectionsGroupDelay(s []Section, omega float64) (samples float64) {
	_, samples = squareAndDelay(s, omega)
	return samples
}

// SectionsMagnitude returns the modulus of SectionsAt, with the same accuracy and
// much faster.
func SectionsMagnitude(s []Section, omega float64) float64 {
	squared, _ := squareAndDelay(s, omega)
	return math.Sqrt(squared)
}

// squareAndDelay returns the cascade's |H|^2 and group delay.
func squareAndDelay(s []Section, omega float64) (squared, samples float64) {
	squared = 1
	if len(s) == 0 {
		return squared, samples
	}
	p := pointAt(omega)
	for _, section := range s {
		above, late := section.numerator().squareAndDelay(p)
		below, early := section.denominator().squareAndDelay(p)
		squared *= above / below
		samples += late - early
	}
	return squared, samples
}

// Impulse returns the first n samples of the cascade's impulse response, from
// rest, by the transposed direct form II. n must not be negative.
func Impulse(s []Section, n int) []float64 {
	h := make([]float64, n)
	if n == 0 {
		return h
	}
	h[0] = 1
	for _, section := range s {
		section.run(h)
	}
	return h
}

// run filters x in place, from rest.
func (s Section) run(x []float64) {
	var first, second float64
	for i, in := range x {
		out := s.B0*in + first
		first = s.B1*in - s.A1*out + second
		second = s.B2*in - s.A2*out
		x[i] = out
	}
}
