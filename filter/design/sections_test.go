package design

import (
	"fmt"
	"math"
	"math/big"
	"math/cmplx"
	"testing"

	"fettle/filter/response"
)

// TestSectionsEqualZPK: the cascade is the filter it was factored from, no
// section peaks above 40 dB by itself (more in bands of several decades, as
// Sections says), and the cascade up to any section never
// exceeds its target of 1 by more than the grid may hide. All families, narrow
// and wide bands are included.
func TestSectionsEqualZPK(t *testing.T) {
	for kind := Lowpass; kind <= Bandstop; kind++ {
		for _, p := range placesOf(kind) {
			for _, order := range []int{1, 2, 3, 4, 5, 8, 9} {
				for _, family := range familyNamesInTests {
					if family == "linkwitz-riley" && order%2 == 1 {
						continue
					}
					f, err := byOrder(family, kind, order, p.rate, 0.1, 60, p.edges...)
					noError(t, err)
					sharper := 0.0
					if family == "chebyshev1" {
						sharper = 5
					}
					checkFactored(t, fmt.Sprintf("%s %v order %d %v", family, kind, order, p), f, p, sharper)
				}
			}
		}
	}
}

// roundingOf is what the rounding of a section's coefficients may cost: four
// roundings of 2^-53 over the least value of its denominator on the circle,
// which is |1-p| times twice the distance of the pole from the circle (or |1+p|
// in the left half).
func roundingOf(f ZPK) float64 {
	worst := 0.0
	for _, p := range f.P {
		distance := math.Min(cmplx.Abs(1-p), cmplx.Abs(1+p))
		worst = math.Max(worst, math.Ldexp(4, -53)/(2*distance*(1-cmplx.Abs(p))))
	}
	return worst
}

// checkFactored allows a section of a wide band to peak sharper dB more.
func checkFactored(t *testing.T, name string, f ZPK, p place, sharper float64) {
	t.Helper()
	s := f.Sections()
	if want := (len(f.P) + 1) / 2; len(s) != want {
		t.Errorf("%s: %d sections, want %d", name, len(s), want)
	}
	allowed := 1e-12 + 2*roundingOf(f) // two sections can be that sharp
	for _, omega := range probeOmegas(p) {
		near(t, name, cmplx.Abs(response.SectionsAt(s, omega)-f.At(omega)), 0, allowed)
	}
	omegas := append(probeOmegas(p), f.telling()...)
	for i := range s {
		alone, upTo := peak(s[i:i+1], omegas), peak(s[:i+1], omegas)
		allowed := 40 + math.Max(0, toDB(p.edges[len(p.edges)-1]/p.edges[0])-20+sharper)
		if !(toDB(alone) <= allowed) {
			t.Errorf("%s: section %d peaks at %.1f dB, allowed %.1f dB", name, i, toDB(alone), allowed)
		}
		if !(upTo <= 1.05) {
			t.Errorf("%s: the first %d sections peak at %.4f, allowed 1.05", name, i+1, upTo)
		}
	}
}

func peak(s []response.Section, omegas []float64) float64 {
	largest := 0.0
	for _, omega := range omegas {
		largest = math.Max(largest, cmplx.Abs(response.SectionsAt(s, omega)))
	}
	return largest
}

// TestSectionsLowCornerPrecision separates the two errors of a 10 Hz, order 8
// filter at 192 kHz: what float64 coefficients cost (200-bit evaluation of the
// sections against the definition) and what float64 evaluation adds.
func TestSectionsLowCornerPrecision(t *testing.T) {
	p := place{192000, []float64{10}}
	for _, kind := range []Kind{Lowpass, Highpass} {
		f, err := Butterworth(kind, 8, p.rate, p.edges...)
		noError(t, err)
		s := f.Sections()
		coefficients, evaluation := 0.0, 0.0
		for _, omega := range probeOmegas(p) {
			precise := preciseMagnitude(s, omega)
			want := butterworthMagnitude(kind, 8, omega, prewarpAll(p.edges, p.rate))
			coefficients = math.Max(coefficients, math.Abs(precise-want))
			evaluation = math.Max(evaluation, math.Abs(cmplx.Abs(response.SectionsAt(s, omega))-precise))
		}
		t.Logf("%v: coefficients cost %.2g, evaluation %.2g of the passband", kind, coefficients, evaluation)
		near(t, "coefficients", coefficients, 0, 1e-9)
		near(t, "evaluation", evaluation, 0, 1e-13)
	}
}

// preciseMagnitude multiplies |b|^2/|a|^2 of each section in 200 bits. With
// c = cos(omega) exact to 200 bits, |c0 + c1/z + c2/z^2|^2 is
// (c0-c2)^2 + c1^2 + 2 c1 (c0+c2) c + 4 c0 c2 c^2.
func preciseMagnitude(s []response.Section, omega float64) float64 {
	c := preciseCos(omega)
	square := precise(1)
	for _, section := range s {
		square.Mul(square, squareAt(section.B0, section.B1, section.B2, c))
		square.Quo(square, squareAt(1, section.A1, section.A2, c))
	}
	magnitude, _ := square.Sqrt(square).Float64()
	return magnitude
}

func precise(v float64) *big.Float { return new(big.Float).SetPrec(200).SetFloat64(v) }

func product(factors ...*big.Float) *big.Float {
	p := precise(1)
	for _, f := range factors {
		p.Mul(p, f)
	}
	return p
}

func squareAt(c0, c1, c2 float64, c *big.Float) *big.Float {
	a0, a1, a2 := precise(c0), precise(c1), precise(c2)
	difference, sum := new(big.Float).Sub(a0, a2), new(big.Float).Add(a0, a2)
	total := product(difference, difference)
	total.Add(total, product(a1, a1))
	total.Add(total, product(precise(2), a1, sum, c))
	return total.Add(total, product(precise(4), a0, a2, c, c))
}

func preciseCos(x float64) *big.Float {
	sum, term := precise(0), precise(1)
	for k := 1; k < 80; k += 2 {
		sum.Add(sum, term)
		term = product(term, precise(x), precise(x))
		term.Quo(term, precise(-float64(k*(k+1))))
	}
	return sum
}

// TestSectionsPanics on filters that are not of real coefficients.
func TestSectionsPanics(t *testing.T) {
	for _, f := range []ZPK{
		{Z: []complex128{1}, P: nil, K: 1},
		{Z: []complex128{1i}, P: []complex128{0.5}, K: 1},
	} {
		func() {
			defer func() {
				if recover() == nil {
					t.Errorf("%v was factored", f)
				}
			}()
			f.Sections()
		}()
	}
	if s := (ZPK{K: -2}).Sections(); len(s) != 1 || s[0].B0 != -2 {
		t.Errorf("a gain alone became %v", s)
	}
	if h := (ZPK{K: -2}).At(1); h != -2 {
		t.Errorf("a gain alone has the response %v", h)
	}
}

// squaredDistance is |jx - root|^2.
func squaredDistance(root complex128, x float64) *big.Float {
	re, im := precise(real(root)), new(big.Float).Sub(precise(x), precise(imag(root)))
	return new(big.Float).Add(product(re, re), product(im, im))
}
