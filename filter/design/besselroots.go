package design

import (
	"math"
	"math/big"
	"math/cmplx"
)

// besselRoots returns the roots of the reverse Bessel polynomial
//
//	theta_n = (2n-1) theta_(n-1) + s^2 theta_(n-2),  theta_0 = 1, theta_1 = s + 1
//
// in exact conjugates, the real one of an odd order last (Grosswald, Bessel
// Polynomials, Springer 1978). All roots are moved together by Aberth's method
// (Mathematics of Computation 27, 1973) from points on a half circle near which
// they lie; it converges cubically, so steps under 1e-10 of the root leave nothing
// but rounding. The polynomial is only ever evaluated by its recurrence, and in 128
// bits: in float64 the roots of order 32 would have no correct digit.
func besselRoots(order int) []complex128 {
	upper := make([]complex128, (order+1)/2) // and the real one
	for i := range upper {
		sin, cos := math.Sincos(math.Pi * (float64(i) + 0.5) / float64(order))
		upper[i] = complex(-sin, cos) * complex(0.9*float64(order), 0)
	}
	if order%2 == 1 {
		upper[order/2] = complex(-0.9*float64(order), 0)
	}
	for range 100 {
		moved := 0.0
		for i, r := range upper {
			step := aberthStep(order, upper, i)
			upper[i] -= step
			moved = math.Max(moved, cmplx.Abs(step/r))
		}
		if moved < 1e-10 {
			break
		}
	}
	var roots []complex128
	for _, r := range upper[:order/2] {
		roots = append(roots, r, cmplx.Conj(r))
	}
	return append(roots, upper[order/2:]...)
}

// aberthStep is Newton's step away from all other roots: those listed and, of
// each that is not real, the conjugate.
func aberthStep(order int, upper []complex128, i int) complex128 {
	step := besselNewton(order, upper[i])
	repulsion := complex(0, 0)
	for j, other := range upper {
		if j != i {
			repulsion += 1 / (upper[i] - other)
		}
		if imag(other) != 0 {
			repulsion += 1 / (upper[i] - cmplx.Conj(other))
		}
	}
	return step / (1 - step*repulsion)
}

// besselNewton returns theta/theta' of an order at s, with
// theta_n' = theta_n - s theta_(n-1). The quotient needs no more digits than
// float64 has, because it only corrects s.
func besselNewton(order int, s complex128) complex128 {
	point, before := newBigComplex(s), newBigComplex(1)
	theta, square := point.plus(before), point.times(point)
	for n := 2; n <= order; n++ {
		before, theta = theta, theta.times(newBigComplex(complex(float64(2*n-1), 0))).plus(square.times(before))
	}
	slope := theta.minus(point.times(before))
	return theta.float64() / slope.float64()
}

// bigComplex is a complex number of 128 bits a part, never changed in place.
type bigComplex struct{ re, im *big.Float }

func newBigComplex(c complex128) bigComplex {
	return bigComplex{bigFloat().SetFloat64(real(c)), bigFloat().SetFloat64(imag(c))}
}

func bigFloat() *big.Float { return new(big.Float).SetPrec(128) }

func (a bigComplex) plus(b bigComplex) bigComplex {
	return bigComplex{bigFloat().Add(a.re, b.re), bigFloat().Add(a.im, b.im)}
}

func (a bigComplex) minus(b bigComplex) bigComplex {
	return bigComplex{bigFloat().Sub(a.re, b.re), bigFloat().Sub(a.im, b.im)}
}

func (a bigComplex) times(b bigComplex) bigComplex {
	return bigComplex{
		bigFloat().Sub(bigFloat().Mul(a.re, b.re), bigFloat().Mul(a.im, b.im)),
		bigFloat().Add(bigFloat().Mul(a.re, b.im), bigFloat().Mul(a.im, b.re)),
	}
}

func (a bigComplex) float64() complex128 {
	re, _ := a.re.Float64()
	im, _ := a.im.Float64()
	return complex(re, im)
}
