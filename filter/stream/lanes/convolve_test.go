package lanes

import (
	"fmt"
	"math"
	"slices"
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

// TestConvolveAgainstDefinition sums the definition at some 8 samples of each
// signal.
func TestConvolveAgainstDefinition(t *testing.T) {
	atEachSize(t, func(t *testing.T, e engine, size int) {
		for _, taps := range tapsFor(size) {
			p := newPlan(taps, size, e)
			x := p.noise(1)
			y := slices.Clone(x)
			p.Convolve(y)
			for s := range 2 * e.lanes {
				in, out := signal(x, e.lanes, s), signal(y, e.lanes, s)
				var got, want []float64
				for n := s % 3; n < size; n += 1 + size/7 {
					got, want = append(got, out[n]), append(want, slowCircularAt(taps, in, n))
				}
				tol := blockError(size, taps, math.Sqrt2*norm(in))
				compare(t, fmt.Sprintf("%d taps, signal %d", len(taps), s), got, want, tol)
			}
		}
	})
}

// TestConvolveAgainstLibrary compares every sample with the product of
// gonum's transforms.
func TestConvolveAgainstLibrary(t *testing.T) {
	atEachSize(t, func(t *testing.T, e engine, size int) {
		taps := noise(30, size/4+1)
		p := newPlan(taps, size, e)
		x := p.noise(2)
		y := slices.Clone(x)
		p.Convolve(y)
		for s := range 2 * e.lanes {
			in := signal(x, e.lanes, s)
			// The library's own error comes on top, hence twice.
			tol := 2 * blockError(size, taps, math.Sqrt2*norm(in))
			compare(t, fmt.Sprintf("signal %d", s), signal(y, e.lanes, s), libraryCircular(taps, in), tol)
		}
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

// TestSpectrumAgainstLibrary: the order is the bit-reversed one.
func TestSpectrumAgainstLibrary(t *testing.T) {
	for size := MinSize; size <= 65536; size *= 2 {
		taps := noise(40, size)
		z := make([]complex128, size)
		for i, h := range taps {
			z[i] = complex(h/float64(size), 0)
		}
		want := fourier.NewCmplxFFT(size).Coefficients(nil, z)
		got := newPlan(taps, size, engine{machine.Portable, 4}).spectrum
		// Real taps have half the norm's square in each half of the spectrum; the
		// library errs too, hence twice.
		tol := 2 * eps * math.Log2(float64(size)) * norm(taps) / float64(size)
		for i := range got {
			d := got[i] - want[reverse(i, size)]
			if !(math.Hypot(real(d), imag(d)) <= tol) {
				t.Fatalf("size %d: point %d is off by %v, allowed %.3g", size, i, d, tol)
			}
		}
	}
}

// TestImpulses: a unit impulse shifts and a scaled one scales.
func TestImpulses(t *testing.T) {
	atEachSize(t, func(t *testing.T, e engine, size int) {
		for _, at := range []int{0, 1, size / 2, size - 1} {
			p := newPlan(impulse(at, size), size, e)
			x := p.noise(3)
			y := slices.Clone(x)
			p.Convolve(y)
			want := slices.Concat(x[len(x)-2*e.lanes*at:], x[:len(x)-2*e.lanes*at])
			compare(t, fmt.Sprintf("shift by %d", at), y, want, blockError(size, []float64{1}, norm(signal(x, e.lanes, 0))))
		}
	})
}

// TestTwinsAgree to 1e-13 of the peak of the block: the kernels and the plain Go
// of the same layout.
func TestTwinsAgree(t *testing.T) {
	atEachSize(t, func(t *testing.T, e engine, size int) {
		taps := noise(50, size/4+1)
		p, twin := newPlan(taps, size, e), newPlan(taps, size, engine{machine.Portable, e.lanes})
		x := p.noise(4)
		y := slices.Clone(x)
		p.Convolve(x)
		twin.Convolve(y)
		for s := range 2 * e.lanes {
			want := signal(y, e.lanes, s)
			compare(t, fmt.Sprintf("signal %d", s), signal(x, e.lanes, s), want, 1e-13*peak(want))
		}
	})
}

// TestLargeBlock goes three levels deep in two passes at once.
func TestLargeBlock(t *testing.T) {
	const size = 1 << 20
	p := newPlan([]float64{0, 0, 1}, size, engine{machine.Best(), Of(machine.Best())})
	x := p.noise(9)
	y := slices.Clone(x)
	p.Convolve(y)
	shift := 2 * 2 * p.lanes
	want := slices.Concat(x[len(x)-shift:], x[:len(x)-shift])
	compare(t, "shift by 2", y, want, blockError(size, []float64{1}, norm(signal(x, p.lanes, 0))))
}

// TestLanesAreIndependent: whatever stands in the other blocks, be it NaN, a
// block gives the same bits; and so it does in another place.
func TestLanesAreIndependent(t *testing.T) {
	atEachSize(t, func(t *testing.T, e engine, size int) {
		p := newPlan(noise(60, size/4+1), size, e)
		block := noise(5, 2*size)
		want := p.convolveAmong(block, 0, 0)
		for lane := range e.lanes {
			for _, other := range []float64{1e300, math.Inf(1), math.NaN()} {
				sameBits(t, fmt.Sprintf("lane %d among %v", lane, other), p.convolveAmong(block, lane, other), want)
			}
		}
	})
}

// convolveAmong puts the block, its real parts and then its imaginary parts, in
// one lane, a value in all others, and returns what the lane gives.
func (p *Plan) convolveAmong(block []float64, lane int, other float64) []float64 {
	x := p.Buffer()
	for i := range x {
		x[i] = other
	}
	for i := range p.size {
		x[2*p.lanes*i+lane], x[2*p.lanes*i+p.lanes+lane] = block[i], block[p.size+i]
	}
	p.Convolve(x)
	return slices.Concat(signal(x, p.lanes, lane), signal(x, p.lanes, p.lanes+lane))
}

// TestSilenceStaysSilent, exactly.
func TestSilenceStaysSilent(t *testing.T) {
	atEachSize(t, func(t *testing.T, e engine, size int) {
		p := newPlan(noise(70, size), size, e)
		x := p.Buffer()
		p.Convolve(x)
		compare(t, "silence", x, make([]float64, len(x)), 0)
	})
}

func TestRandomTapsAndSizes(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		e := rapid.SampledFrom(engines()).Draw(t, "engine")
		size := 1 << rapid.IntRange(5, 12).Draw(t, "log2 size")
		taps := noise(rapid.Uint64().Draw(t, "seed"), rapid.IntRange(1, size).Draw(t, "taps"))
		p := newPlan(taps, size, e)
		x := p.noise(rapid.Uint64().Draw(t, "signal seed"))
		s := rapid.IntRange(0, 2*e.lanes-1).Draw(t, "signal")
		n := rapid.IntRange(0, size-1).Draw(t, "sample")
		in := signal(x, e.lanes, s)
		p.Convolve(x)
		compare(t, "sample", signal(x, e.lanes, s)[n:n+1], []float64{slowCircularAt(taps, in, n)}, blockError(size, taps, math.Sqrt2*norm(in)))
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
