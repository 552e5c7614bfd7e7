package stream

import (
	"fmt"
	"math"
	"math/cmplx"

	"fettle/filter/response"
)

// The tail of a cascade is estimated without running it. For every circle
// |z| = s outside all poles, Cauchy's integral for h[n] gives
//
//	|h[n]| <= s^n max |H| on the circle,
//
// and every circle of radius g > 1 gives, from the sum that defines H,
//
//	peak |h| >= (1 - 1/g) max |H| on the circle,
//
// so that h stays below 1e-15 of its peak from the n on where the first is
// less than 1e-15 of the second. (The first is Cauchy's estimate of a
// coefficient of a power series, in any textbook of complex analysis; the
// second follows from the geometric series.) With r the largest pole radius the circles tried are r^a
// for several a, below 1 inside the unit circle and, as 1/r^a, outside: poles
// that lie together want another a than poles apart, and the maximum of |H|
// takes that into account, as it does zeros that nearly cancel a pole. The
// maximum is looked for at the angles of the poles and a few half widths
// beside them; a margin covers what lies between.

// inaudible is the part of the peak at which the tail ends.
const inaudible = 1e-15

// betweenAngles is the margin on a maximum of |H| that was only sampled.
const betweenAngles = 4

// leastRadius is the smallest r that is reckoned with, so that powers of its
// inverse stay finite; the bounds hold for any r outside the poles.
const leastRadius = 1e-3

// ringing returns after how many samples the impulse response stays below
// inaudible of its peak.
func ringing(sections []response.Section) int {
	r, angles := poleAngles(sections)
	if r == 0 {
		return numeratorOrder(sections)
	}
	r = max(r, leastRadius)
	floor := inaudible * peakAtLeast(sections, r, angles)
	if floor == 0 {
		return 0
	}
	best := math.Inf(1)
	for _, a := range []float64{0.3, 0.5, 0.7, 0.8, 0.9, 0.95} {
		s := math.Pow(r, a)
		top := betweenAngles * largest(sections, s, angles)
		best = min(best, math.Log(floor/top)/math.Log(s))
	}
	return int(math.Ceil(max(0, best)))
}

// poleAngles returns the largest pole radius and the angles to look at, which
// are those of poles and of their surroundings.
func poleAngles(sections []response.Section) (r float64, angles []float64) {
	for _, s := range sections {
		for _, p := range poles(s) {
			r = max(r, cmplx.Abs(p))
			for _, beside := range []float64{-3, -1, -0.3, 0, 0.3, 1, 3} {
				angles = append(angles, cmplx.Phase(p)+beside*(1-cmplx.Abs(p)))
			}
		}
	}
	return r, angles
}

// checkStable panics unless all coefficients are finite and all poles inside
// the unit circle.
func checkStable(sections []response.Section) {
	for i, s := range sections {
		if sum := s.B0 + s.B1 + s.B2 + s.A1 + s.A2; math.IsNaN(sum) || math.IsInf(sum, 0) {
			panic(fmt.Sprintf("stream: section %d of %d, %+v, has a coefficient that is not finite", i+1, len(sections), s))
		}
		for _, p := range poles(s) {
			if !(cmplx.Abs(p) < 1) {
				panic(fmt.Sprintf("stream: section %d of %d, %+v, is not stable: it has a pole of radius %.17g", i+1, len(sections), s, cmplx.Abs(p)))
			}
		}
	}
}

// poles returns the roots of z^2 + A1 z + A2, the larger of two real ones
// first and the other from the product, which loses no digits.
func poles(s response.Section) [2]complex128 {
	half, d := -s.A1/2, s.A1*s.A1/4-s.A2
	if d < 0 {
		w := math.Sqrt(-d)
		return [2]complex128{complex(half, w), complex(half, -w)}
	}
	p := half + math.Copysign(math.Sqrt(d), half)
	if p == 0 {
		return [2]complex128{}
	}
	return [2]complex128{complex(p, 0), complex(s.A2/p, 0)}
}

func numeratorOrder(sections []response.Section) int {
	order := 0
	for _, s := range sections {
		switch {
		case s.B2 != 0:
			order += 2
		case s.B1 != 0:
			order++
		}
	}
	return order
}

func peakAtLeast(sections []response.Section, r float64, angles []float64) float64 {
	peak := 1.0 // becomes |h[0]|
	for _, s := range sections {
		peak *= math.Abs(s.B0)
	}
	for _, a := range []float64{0.1, 0.3, 1, 3} {
		g := math.Pow(r, -a)
		peak = max(peak, (1-1/g)*largest(sections, g, angles))
	}
	return peak
}

// largest returns the largest |H| at the angles on a circle.
func largest(sections []response.Section, radius float64, angles []float64) float64 {
	top := 0.0
	for _, angle := range angles {
		back := cmplx.Rect(1/radius, -angle) // z^-1
		gain := 1.0
		for _, s := range sections {
			gain *= sectionGain(s, back)
		}
		top = max(top, gain)
	}
	return top
}

func sectionGain(s response.Section, back complex128) float64 {
	num := complex(s.B0, 0) + back*(complex(s.B1, 0)+back*complex(s.B2, 0))
	den := 1 + back*(complex(s.A1, 0)+back*complex(s.A2, 0))
	return cmplx.Abs(num) / cmplx.Abs(den)
}
