package figures

import (
	"math"
	"math/cmplx"

	"fettle/filter/response"

	"gonum.org/v1/gonum/dsp/fourier"
)

// convolver is the linear convolution with one kernel, block by block (overlap-add:
// Oppenheim and Schafer, Discrete-Time Signal Processing, chapter on the discrete
// Fourier transform).
type convolver struct {
	taps   int
	kernel []complex128 // its transform, over the length
	fft    *fourier.FFT
}

// newConvolver serves sequences of any length, those up to longest in one block unless
// that were much longer than the kernel.
func newConvolver(kernel []float64, longest int) *convolver {
	n := fastLength(min(longest+len(kernel)-1, 4*len(kernel)))
	c := &convolver{taps: len(kernel), fft: fourier.NewFFT(n)}
	padded := make([]float64, n)
	copy(padded, kernel)
	c.kernel = c.fft.Coefficients(nil, padded)
	for k := range c.kernel {
		c.kernel[k] /= complex(float64(n), 0)
	}
	return c
}

// of is the convolution of x with the kernel, of length len(x)+taps-1.
func (c *convolver) of(x []float64) []float64 {
	out := make([]float64, len(x)+c.taps-1)
	block, bins := make([]float64, c.fft.Len()), make([]complex128, len(c.kernel))
	hop := len(block) - c.taps + 1
	for from := 0; from < len(x); from += hop {
		clear(block[copy(block[:hop], x[from:]):])
		c.fft.Coefficients(bins, block)
		for k, h := range c.kernel {
			bins[k] *= h
		}
		c.fft.Sequence(block, bins)
		for i, v := range block[:min(len(block), len(out)-from)] {
			out[from+i] += v
		}
	}
	return out
}

// aroundZero is Σ c(k)·e^(j2πki/n) over k = 0 to n/2, for as many i about 0 as are asked
// for at least: i modulo the length of what is returned, not normalised. Every P-th of
// the c(k) needs a transform of n/P points only.
func aroundZero(c func(k int) complex128, n, least int) []complex128 {
	apart := 1
	for n%(2*apart) == 0 && n/(2*apart) >= least {
		apart *= 2
	}
	m := n / apart
	fft := fourier.NewCmplxFFT(m)
	sum, part := make([]complex128, m), make([]complex128, m)
	for r := range apart {
		clear(part)
		for k := r; k <= n/2; k += apart {
			part[k/apart] = c(k)
		}
		fft.Sequence(part, part)
		turns := response.NewTurns(2*math.Pi*float64(r)/float64(n), -(m / 2))
		for i := -(m / 2); i < m-m/2; i++ {
			at := (i + m) % m
			sum[at] += part[at] * turns.Next()
		}
	}
	return sum
}

// fastLength is the least 2^k or 3·2^k that is at least n, and a multiple of 8.
func fastLength(n int) int {
	for size := 8; ; size *= 2 {
		if size >= n {
			return size
		}
		if three := size + size/2; size >= 16 && three >= n {
			return three
		}
	}
}

// power is |c|² without the square root of cmplx.Abs.
func power(c complex128) float64 { return real(c)*real(c) + imag(c)*imag(c) }

// turn is e^(jx).
func turn(x float64) complex128 { return cmplx.Rect(1, x) }
