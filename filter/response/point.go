package response

import "math"

// A point is a place on the upper unit circle, held in a form that survives
// next to z = 1 and next to z = -1, where 1 - cos(omega) loses every digit.
// Points of the left half are mirrored to the right one: omega becomes
// pi - omega, and a polynomial's odd coefficient changes sign.
type point struct {
	versine float64 // 1 - cos of the mirrored angle, as 2 sin^2(omega/2)
	sine    float64
	left    bool
}

// pointAt places omega (0..pi). math.Pi itself stands for z = -1 exactly.
func pointAt(omega float64) point {
	if omega == math.Pi {
		return point{left: true}
	}
	if omega > math.Pi/2 {
		half := math.Cos(omega / 2)
		return point{versine: 2 * half * half, sine: math.Sin(omega), left: true}
	}
	half := math.Sin(omega / 2)
	return point{versine: 2 * half * half, sine: math.Sin(omega)}
}

// quadratic is c0 + c1 z^-1 + c2 z^-2.
type quadratic struct{ c0, c1, c2 float64 }

func (s Section) numerator() quadratic   { return quadratic{s.B0, s.B1, s.B2} }
func (s Section) denominator() quadratic { return quadratic{1, s.A1, s.A2} }

// mirrored returns the polynomial to be read at the mirrored angle.
func (q quadratic) mirrored(p point) quadratic {
	if p.left {
		q.c1 = -q.c1
	}
	return q
}

// sum returns c0 + c1 + c2 rounded once: the value at z = 1.
func (q quadratic) sum() float64 {
	a, aErr := twoSum(q.c0, q.c2)
	b, bErr := twoSum(a, q.c1)
	return b + (aErr + bErr)
}

// twoSum returns the rounded sum and its exact rounding error (Knuth, The Art
// of Computer Programming vol. 2, section 4.2.2, theorem B).
func twoSum(a, b float64) (sum, err float64) {
	sum = a + b
	t := sum - a
	return sum, (a - (sum - t)) + (b - t)
}

// centred returns e^(j omega) times the polynomial at the point: real part
// c1 + (c0+c2) cos(omega), imaginary part (c0-c2) sin(omega). The common
// factor cancels between numerator and denominator.
func (q quadratic) centred(p point) complex128 {
	m := q.mirrored(p)
	re := m.sum() - (m.c0+m.c2)*p.versine
	if p.left {
		re = -re
	}
	return complex(re, (q.c0-q.c2)*p.sine)
}

// squareAndDelay returns the polynomial's squared modulus and its group delay in
// samples at the point. With X + jY the centred value, the delay is
// 1 - (X Y' - Y X')/(X^2 + Y^2), and X Y' - Y X' reduces to
// (c0-c2)(c0 + c2 + c1 cos(omega)).
//
// A zero on the unit circle away from z = 1 and z = -1 means c0 = c2: a
// constant delay of one sample. A zero at z = 1 or z = -1 exactly at the point
// is taken by its limit.
func (q quadratic) squareAndDelay(p point) (square, samples float64) {
	m := q.mirrored(p)
	difference, sum := m.c0-m.c2, m.sum()
	x := sum - (m.c0+m.c2)*p.versine
	y := difference * p.sine
	square = x*x + y*y
	switch {
	case m == (quadratic{}):
		return square, math.NaN()
	case difference == 0:
		return square, 1
	case sum == 0 && p.sine == 0:
		return square, 1 + m.c1/(2*difference)
	}
	return square, 1 - difference*(sum-m.c1*p.versine)/square
}
