package design

import (
	"math"
	"math/cmplx"

	"fettle/filter/response"
)

// The sections of this file keep the magnitude of the cookbook's analogue
// prototypes up to half the rate, where the bilinear transform of the cookbook
// compresses the frequency axis. The method is that of Vicanek, Matched Second
// Order Digital Filters (2016), who gives low-, high- and band-pass and bell, here
// applied to shelves as well: the poles are those of the impulse-invariant
// transform z = exp(s/rate); the numerator's squared magnitude, which is a
// quadratic in phi = sin^2(omega/2), is made to agree with the prototype's by
// three conditions; and of the numerators with that magnitude the one of
// minimum phase is taken. All zeros and poles lie inside the unit circle, and
// +g then -g cancel exactly, as in the cookbook.
//
// Here the polynomials are written in powers of phi, with the small sums
// 1 + a1 + a2 and 1 - a2 for coefficients, so that low corners lose no digits;
// and of two shelves or bells of opposite gain, the one whose poles lie nearer
// 0 Hz is designed, the other being its reciprocal: its poles are then never
// beyond half the rate, where they would alias.

// biquadratic is an analogue second-order section in powers of s over 2 pi f0:
// square, linear, constant.
type biquadratic struct{ num, den [3]float64 }

// squared returns |H|^2 at x = f/f0.
func (b biquadratic) squared(x float64) float64 {
	return squaredAt(b.num, x) / squaredAt(b.den, x)
}

func squaredAt(c [3]float64, x float64) float64 {
	re, im := c[2]-c[0]*x*x, c[1]*x
	return re*re + im*im
}

func (b biquadratic) inverse() biquadratic { return biquadratic{b.den, b.num} }

// The prototypes of the cookbook, A = 10^(gain/40).
func analogueBell(a, q float64) biquadratic {
	return biquadratic{[3]float64{1, a / q, 1}, [3]float64{1, 1 / (a * q), 1}}
}

func analogueLowShelf(a, q float64) biquadratic {
	k := math.Sqrt(a) / q
	return biquadratic{[3]float64{a, a * k, a * a}, [3]float64{a, k, 1}}
}

func analogueHighShelf(a, q float64) biquadratic {
	k := math.Sqrt(a) / q
	return biquadratic{[3]float64{a * a, a * k, a}, [3]float64{1, k, a}}
}

// inPhi is a squared magnitude n0 + n1 phi + n2 phi^2, phi = sin^2(omega/2).
type inPhi [3]float64

func (n inPhi) at(phi float64) float64 { return n[0] + phi*(n[1]+phi*n[2]) }

func (n inPhi) slope(phi float64) float64 { return n[1] + 2*phi*n[2] }

func phiAt(omega float64) float64 {
	sin := math.Sin(omega / 2)
	return sin * sin
}

// impulseInvariant returns the section's denominator with the poles
// exp(w0 s) of the prototype, and its squared magnitude.
func (b biquadratic) impulseInvariant(w0 float64) (response.Section, inPhi) {
	monic := response.Section{B0: 1, A1: b.den[1] / b.den[0], A2: b.den[2] / b.den[0]}
	roots := monic.Poles()
	for i, s := range roots {
		roots[i] = cmplx.Exp(s * complex(w0, 0))
	}
	den := response.Section{B0: 1}
	den.A1, den.A2 = multiplied(roots)
	atOne := 1 / real(response.SectionsAt([]response.Section{den}, 0))
	damping := 1 - den.A2
	return den, inPhi{atOne * atOne, 4 * (damping*damping - atOne*(1+den.A2)), 16 * den.A2}
}

// withNumerator gives the section the minimum-phase numerator of a squared
// magnitude. It is false if that is not above 0 at all frequencies.
func withNumerator(den response.Section, n inPhi) (response.Section, bool) {
	atOne, atMinusOne := math.Sqrt(n[0]), math.Sqrt(n.at(1))
	even := (atOne + atMinusOne) / 2 // b0 + b2
	square := n[1]/4 + atOne*even    // (b0 - b2)^2
	if !(square > 0) {
		return response.Section{}, false
	}
	odd := math.Sqrt(square)
	den.B0, den.B1, den.B2 = (even+odd)/2, (atOne-atMinusOne)/2, (even-odd)/2
	return den, true
}

// matchedPeak agrees with the prototype at 0 Hz, and at w0 in value and in
// slope, which is 0 there.
func (b biquadratic) matchedPeak(w0 float64) (response.Section, bool) {
	den, d := b.impulseInvariant(w0)
	phi, squared := phiAt(w0), b.squared(1)
	value, slope := squared*d.at(phi), squared*d.slope(phi)
	n := inPhi{b.squared(0) * d[0]}
	n[2] = (n[0] - value + slope*phi) / (phi * phi)
	n[1] = slope - 2*n[2]*phi
	return withNumerator(den, n)
}

// matchedEnds agrees with the prototype at 0 Hz, at half the rate, and at w0 or
// a quarter of the rate, whichever is lower.
func (b biquadratic) matchedEnds(w0 float64) (response.Section, bool) {
	den, d := b.impulseInvariant(w0)
	omega := math.Min(w0, math.Pi/2)
	phi := phiAt(omega)
	n := inPhi{b.squared(0) * d[0]}
	chord := (b.squared(omega/w0)*d.at(phi) - n[0]) / phi
	n[2] = (b.squared(math.Pi/w0)*d.at(1) - n[0] - chord) / (1 - phi)
	n[1] = chord - n[2]*phi
	return withNumerator(den, n)
}

// matchedDouble is for a prototype with a double zero at 0 Hz: it stays there,
// and the gain agrees at w0.
func (b biquadratic) matchedDouble(w0 float64) (response.Section, bool) {
	den, d := b.impulseInvariant(w0)
	phi := phiAt(w0)
	gain := math.Sqrt(b.squared(1)*d.at(phi)) / (4 * phi)
	den.B0, den.B1, den.B2 = gain, -2*gain, gain
	return den, true
}
