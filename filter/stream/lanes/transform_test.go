package lanes

import (
	"fmt"
	"math"
	"math/cmplx"
	"slices"
	"testing"

	"gonum.org/v1/gonum/dsp/fourier"
)

// atTransformSizes runs the test at the sizes of whole blocks and below.
func atTransformSizes(t *testing.T, test func(t *testing.T, size int)) {
	for size := 32; size <= 32768; size *= 2 {
		t.Run(fmt.Sprint(size), func(t *testing.T) { test(t, size) })
	}
}

// transformError allows eps log2 N |x| on each point of an unnormalised
// transform, norms being Euclidean: a point is a sum of N terms with unit
// factors, in log2 N levels. See blockError.
func transformError(size int, norm float64) float64 {
	return eps * math.Log2(float64(size)) * norm
}

// transform returns the transform in natural order.
func transform(re, im []float64) []complex128 {
	x := make([]complex128, len(re))
	forward(x, re, im, table(len(x)/4))
	return reversed(x)
}

// reversed swaps every point with the one at its index with the bits reversed.
func reversed(x []complex128) []complex128 {
	y := make([]complex128, len(x))
	for i, v := range x {
		y[reverse(i, len(x))] = v
	}
	return y
}

func combine(re, im []float64) []complex128 {
	z := make([]complex128, len(re))
	for i := range z {
		z[i] = complex(re[i], im[i])
	}
	return z
}

func complexNorm(x []complex128) float64 {
	var square sum
	for _, v := range x {
		square.addProduct(real(v), real(v))
		square.addProduct(imag(v), imag(v))
	}
	return math.Sqrt(square.total)
}

func compareComplex(t *testing.T, what string, got, want []complex128, tol float64) {
	t.Helper()
	diff := make([]float64, len(want))
	for i := range diff {
		diff[i] = cmplx.Abs(got[i] - want[i])
	}
	compare(t, what, diff, make([]float64, len(want)), tol)
}

// TestForwardAgainstDefinition sums the definition at some 64 frequencies.
func TestForwardAgainstDefinition(t *testing.T) {
	atTransformSizes(t, func(t *testing.T, size int) {
		re, im := noise(1, size), noise(2, size)
		x := combine(re, im)
		got := transform(re, im)
		var some, want []complex128
		for k := 0; k < size; k += 1 + size/64 {
			some, want = append(some, got[k]), append(want, slowPoint(x, k))
		}
		compareComplex(t, "spectrum", some, want, transformError(size, complexNorm(x)))
	})
}

// slowPoint is X[k] by definition, summed in halves so that its own rounding
// stays below that of the transform.
func slowPoint(x []complex128, k int) complex128 {
	terms := make([]complex128, len(x))
	for n, v := range x {
		terms[n] = v * cmplx.Rect(1, -2*math.Pi*float64(k*n%len(x))/float64(len(x)))
	}
	for len(terms) > 1 {
		half := len(terms) / 2
		for i := range half {
			terms[i] += terms[half+i]
		}
		terms = terms[:half]
	}
	return terms[0]
}

func TestForwardAgainstLibrary(t *testing.T) {
	atTransformSizes(t, func(t *testing.T, size int) {
		re, im := noise(3, size), noise(4, size)
		x := combine(re, im)
		want := fourier.NewCmplxFFT(size).Coefficients(nil, x)
		// The library's own error comes on top, hence twice.
		compareComplex(t, "spectrum", transform(re, im), want, 2*transformError(size, complexNorm(x)))
	})
}

func TestForwardKeepsEnergy(t *testing.T) {
	atTransformSizes(t, func(t *testing.T, size int) {
		re, im := noise(5, size), noise(6, size)
		in := complexNorm(combine(re, im))
		out := complexNorm(transform(re, im)) / math.Sqrt(float64(size))
		if diff := math.Abs(out/in - 1); !(diff <= transformError(size, 1)) {
			t.Errorf("Parseval: norms differ by %.3g, allowed %.3g", diff, transformError(size, 1))
		}
	})
}

func TestForwardIsLinear(t *testing.T) {
	atTransformSizes(t, func(t *testing.T, size int) {
		zero := make([]float64, size)
		a, b := noise(7, size), noise(8, size)
		sum := make([]float64, size)
		for i := range sum {
			sum[i] = 0.5*a[i] - 2*b[i]
		}
		fa, fb := transform(a, zero), transform(b, zero)
		for i := range fa {
			fa[i] = 0.5*fa[i] - 2*fb[i]
		}
		compareComplex(t, "0.5 a - 2 b", transform(sum, zero), fa, transformError(size, 0.5*norm(a)+2*norm(b)))
	})
}

// TestForwardOfImpulseIsExact: every point is 1, as no factor is multiplied
// by anything but zero.
func TestForwardOfImpulseIsExact(t *testing.T) {
	atTransformSizes(t, func(t *testing.T, size int) {
		got := transform(impulse(0, size), make([]float64, size))
		compareComplex(t, "spectrum", got, slices.Repeat([]complex128{1}, size), 0)
	})
}

// inverse transforms a spectrum in reversed order back: the spectrum of an
// impulse is exactly 1, so multiplying by x/N and going back gives the inverse.
func inverse(spectrum []complex128) []complex128 {
	size := len(spectrum)
	scaled := make([]complex128, size)
	for i, v := range spectrum {
		scaled[i] = v / complex(float64(size), 0)
	}
	re, im := make([]float64, size), make([]float64, size)
	(&portable{scaled, table(size / 4)}).convolve(re, im, impulse(0, size), make([]float64, size), make([]complex128, size))
	return combine(re, im)
}

func TestInverseUndoesForward(t *testing.T) {
	atTransformSizes(t, func(t *testing.T, size int) {
		re, im := noise(9, size), noise(10, size)
		x := make([]complex128, size)
		forward(x, re, im, table(size/4))
		want := combine(re, im)
		compareComplex(t, "round trip", inverse(x), want, 2*transformError(size, complexNorm(want)/math.Sqrt(float64(size))))
	})
}

// TestConvolveWithTurnedImpulse convolves with an impulse at 1 that is turned by
// 90 degrees: a circular shift by one, times j.
func TestConvolveWithTurnedImpulse(t *testing.T) {
	atTransformSizes(t, func(t *testing.T, size int) {
		p := portable{make([]complex128, size), table(size / 4)}
		turned := impulse(1, size)
		turned[1] /= float64(size)
		forward(p.spectrum, make([]float64, size), turned, p.factors)
		x := combine(noise(11, size), noise(12, size))
		re, im := make([]float64, size), make([]float64, size)
		p.convolve(re, im, noise(11, size), noise(12, size), make([]complex128, size))
		want := make([]complex128, size)
		for i := range want {
			want[i] = 1i * x[(i+size-1)%size]
		}
		compareComplex(t, "shifted by one", combine(re, im), want, 2*transformError(size, complexNorm(x)/math.Sqrt(float64(size))))
	})
}

// reverse returns i with the bits of 0 to size-1 in reversed order, bit by bit.
func reverse(i, size int) int {
	r := 0
	for ; size > 1; size /= 2 {
		r, i = 2*r+i%2, i/2
	}
	return r
}
