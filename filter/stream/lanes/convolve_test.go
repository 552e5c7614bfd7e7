package lanes

import (
	"fmt"
	"math"
	"testing"

	"gonum.org/v1/gonum/dsp/fourier"
	"pgregory.net/rapid"

	"fettle/filter/stream/machine"
)

// blockError allows eps log2 N |h| |x| on each sample of a block, norms being
// Euclidean and x complex. A transform errs by about eps/2 log2 N times the norm
// of what it is given, in that norm (Higham, "Accuracy and Stability of Numerical
// Algorithms", 2nd ed., section 24.1, with a constant near 1 for accurate
// factors); two of them, and the one of the taps, are at most 3/2 eps log2 N |h|
// |x| over all N samples if all were to err alike. As errors scatter, the norm of
// the whole is an ample bound of one sample.
func blockError(size int, taps []float64, xnorm float64) float64 {
	return eps * math.Log2(float64(size)) * norm(taps) * xnorm
}

// tapsFor returns taps of the lengths that matter: one, some, a quarter and one
// (the overlap that overlap-save allows), all.
func tapsFor(size int) [][]float64 {
	return [][]float64{noise(20, 1), noise(21, 7), noise(22, size/4+1), noise(23, size)}
}

// TestConvolveAgainstDefinition sums the definition at some samples of both
// signals.
func TestConvolveAgainstDefinition(t *testing.T) {
	atEachSize(t, func(t *testing.T, k machine.Kernel, size int) {
		for _, taps := range tapsFor(size) {
			re, im := noise(1, size), noise(2, size)
			yre, yim := convolved(New(taps, size, k), re, im)
			var got, want []float64
			for n := 3; n < size; n += 1 + size/29 {
				got = append(got, yre[n], yim[n])
				want = append(want, slowCircularAt(taps, re, n), slowCircularAt(taps, im, n))
			}
			compare(t, fmt.Sprintf("%d taps", len(taps)), got, want, blockError(size, taps, math.Hypot(norm(re), norm(im))))
		}
	})
}

// TestConvolveAgainstLibrary compares every sample with the product of
// gonum's transforms.
func TestConvolveAgainstLibrary(t *testing.T) {
	atEachSize(t, func(t *testing.T, k machine.Kernel, size int) {
		taps := noise(30, size/4+1)
		re, im := noise(3, size), noise(4, size)
		yre, yim := convolved(New(taps, size, k), re, im)
		// The library's own error comes on top, hence twice.
		tol := 2 * blockError(size, taps, math.Hypot(norm(re), norm(im)))
		compare(t, "real part", yre, libraryCircular(taps, re), tol)
		compare(t, "imaginary part", yim, libraryCircular(taps, im), tol)
	})
}

func libraryCircular(taps, x []float64) []float64 {
	fft := fourier.NewFFT(len(x))
	padded := make([]float64, len(x))
	copy(padded, taps)
	h, spectrum := fft.Coefficients(nil, padded), fft.Coefficients(nil, x)
	for i := range spectrum {
		spectrum[i] *= h[i] / complex(float64(len(x)), 0)
	}
	return fft.Sequence(nil, spectrum)
}

// TestImpulses: a unit impulse shifts.
func TestImpulses(t *testing.T) {
	atEachSize(t, func(t *testing.T, k machine.Kernel, size int) {
		for _, at := range []int{0, 1, size / 2, size - 1} {
			re, im := noise(5, size), noise(6, size)
			yre, yim := convolved(New(impulse(at, size), size, k), re, im)
			tol := blockError(size, []float64{1}, math.Hypot(norm(re), norm(im)))
			compare(t, fmt.Sprintf("real part by %d", at), yre, rotated(re, at), tol)
			compare(t, fmt.Sprintf("imaginary part by %d", at), yim, rotated(im, at), tol)
		}
	})
}

// rotated is x shifted circularly.
func rotated(x []float64, by int) []float64 {
	return append(append([]float64(nil), x[len(x)-by:]...), x[:len(x)-by]...)
}

// TestKernelsAgree to 1e-13 of the peak of the block.
func TestKernelsAgree(t *testing.T) {
	atEachSize(t, func(t *testing.T, k machine.Kernel, size int) {
		taps := noise(50, size/4+1)
		re, im := noise(7, size), noise(8, size)
		wantRe, wantIm := convolved(New(taps, size, machine.Portable), re, im)
		gotRe, gotIm := convolved(New(taps, size, k), re, im)
		tol := 1e-13 * max(peak(wantRe), peak(wantIm))
		compare(t, "real part", gotRe, wantRe, tol)
		compare(t, "imaginary part", gotIm, wantIm, tol)
	})
}

// TestLargeBlock is deep enough for every kind of pass.
func TestLargeBlock(t *testing.T) {
	const size = 1 << 20
	re, im := noise(9, size), noise(10, size)
	yre, yim := convolved(New([]float64{0, 0, 1}, size, machine.Best()), re, im)
	tol := blockError(size, []float64{1}, math.Hypot(norm(re), norm(im)))
	compare(t, "real part", yre, rotated(re, 2), tol)
	compare(t, "imaginary part", yim, rotated(im, 2), tol)
}

// TestInPlace: an output may be an input, also that of the other part.
func TestInPlace(t *testing.T) {
	atEachSize(t, func(t *testing.T, k machine.Kernel, size int) {
		p := New(noise(60, size/4+1), size, k)
		re, im := noise(11, size), noise(12, size)
		wantRe, wantIm := convolved(p, re, im)
		p.Convolve(im, re, re, im, p.Scratch())
		sameBits(t, "real part", im, wantRe)
		sameBits(t, "imaginary part", re, wantIm)
	})
}

// TestSilenceStaysSilent, exactly.
func TestSilenceStaysSilent(t *testing.T) {
	atEachSize(t, func(t *testing.T, k machine.Kernel, size int) {
		silence := make([]float64, size)
		yre, yim := convolved(New(noise(70, size), size, k), silence, silence)
		compare(t, "real part", yre, silence, 0)
		compare(t, "imaginary part", yim, silence, 0)
	})
}

func TestRandomTapsAndSizes(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		k := rapid.SampledFrom(machine.Available()).Draw(t, "kernel")
		size := MinSize << rapid.IntRange(0, 6).Draw(t, "octaves")
		taps := noise(rapid.Uint64().Draw(t, "seed"), rapid.IntRange(1, size).Draw(t, "taps"))
		re, im := noise(rapid.Uint64().Draw(t, "signal seed"), size), noise(13, size)
		n := rapid.IntRange(0, size-1).Draw(t, "sample")
		yre, yim := convolved(New(taps, size, k), re, im)
		want := []float64{slowCircularAt(taps, re, n), slowCircularAt(taps, im, n)}
		compare(t, "sample", []float64{yre[n], yim[n]}, want, blockError(size, taps, math.Hypot(norm(re), norm(im))))
	})
}
