package response

import (
	"math"
	"math/cmplx"
)

// Zeros returns the section's finite zeros in the z plane, at most two. A
// first-order section (B2 = A2 = 0) has at most one; B0 = 0 moves a zero to
// infinity, which is not listed. Conjugates come upper half first, real zeros
// larger magnitude first.
func (s Section) Zeros() []complex128 {
	return s.roots(s.numerator())
}

// Poles returns the section's poles in the z plane: two, or one for a
// first-order section (B2 = A2 = 0). Order as for Zeros.
func (s Section) Poles() []complex128 {
	return s.roots(s.denominator())
}

// roots solves c0 z^2 + c1 z + c2 = 0, without the root at the origin that
// numerator and denominator of a first-order section share.
func (s Section) roots(q quadratic) []complex128 {
	switch {
	case s.B2 == 0 && s.A2 == 0:
		return linearRoot(q.c0, q.c1)
	case q.c0 == 0:
		return linearRoot(q.c1, q.c2)
	}
	return quadraticRoots(q)
}

func linearRoot(a, b float64) []complex128 {
	if a == 0 {
		return nil
	}
	return []complex128{complex(-b/a, 0)}
}

// quadraticRoots avoids both cancellations: the discriminant is rounded once
// by a fused product, and the smaller real root comes from the product of the
// roots (Press et al., Numerical Recipes, section 5.6).
func quadraticRoots(q quadratic) []complex128 {
	half := q.c1 / 2
	discriminant := differenceOfProducts(half, half, q.c0, q.c2)
	if discriminant < 0 {
		re, im := -half/q.c0, math.Sqrt(-discriminant)/math.Abs(q.c0)
		return []complex128{complex(re, im), complex(re, -im)}
	}
	t := -(half + math.Copysign(math.Sqrt(discriminant), half))
	if t == 0 {
		return []complex128{0, 0}
	}
	return []complex128{complex(t/q.c0, 0), complex(q.c2/t, 0)}
}

// differenceOfProducts returns a*b - c*d to within 1.5 ulp (Jeannerod, Louvet
// & Muller, Mathematics of Computation 82, 2013: Kahan's algorithm).
func differenceOfProducts(a, b, c, d float64) float64 {
	cd := c * d
	cdErr := math.FMA(-c, d, cd)
	return math.FMA(a, b, -cd) + cdErr
}

// MaxPoleRadius returns the largest pole magnitude of the cascade, 0 if it
// has no poles. The impulse response finally decays by this factor a sample.
func MaxPoleRadius(sections []Section) float64 {
	radius := 0.0
	for _, s := range sections {
		for _, p := range s.Poles() {
			radius = math.Max(radius, cmplx.Abs(p))
		}
	}
	return radius
}

// Stable reports whether every pole lies inside the unit circle, by the
// stability triangle |A2| < 1, |A1| < 1 + A2 evaluated without rounding loss.
// NaN coefficients are not stable.
func Stable(sections []Section) bool {
	for _, s := range sections {
		atOne := quadratic{1, s.A1, s.A2}.sum()
		atMinusOne := quadratic{1, -s.A1, s.A2}.sum()
		if !(math.Abs(s.A2) < 1 && atOne > 0 && atMinusOne > 0) {
			return false
		}
	}
	return true
}
