package response

import (
	"fmt"
	"math"
	"math/bits"
	"math/cmplx"

	"gonum.org/v1/gonum/dsp/fourier"
)

// Stated is the magnitude, relative to the maximum, below which a group delay
// is not stated: 60 dB down, where rounding begins to govern it.
const Stated = 1e-3

// TapsAt returns the kernel's response at omega, any real number of radians a
// sample, by Horner's rule; the error is at most about 2e-16 times the number
// of taps times the sum of |h|.
func TapsAt(taps []float64, omega float64) complex128 {
	sin, cos := math.Sincos(omega)
	step := complex(cos, -sin)
	h := complex(0, 0)
	for n := len(taps) - 1; n >= 0; n-- {
		h = h*step + complex(taps[n], 0)
	}
	return h
}

// Spectrum returns bins 0..k/2 of the k-point transform of taps padded with
// zeros: bin i is H(2 pi i/k), not normalised. It panics unless k is even, at
// least 2 and at least len(taps). A k of small prime factors is fast.
func Spectrum(taps []float64, k int) []complex128 {
	return newPaddedFFT(k).transform(taps)
}

// TapsGroupDelay returns the group delay in samples at bins 0..k/2 of the
// k-point transform: Re{ DFT(n h)/DFT(h) }, with n counted from the middle tap
// for the sake of accuracy. A bin more than 60 dB under the largest is NaN: not
// stated. Panics as Spectrum does.
func TapsGroupDelay(taps []float64, k int) []float64 {
	middle := float64(len(taps)-1) / 2
	ramped := make([]float64, len(taps))
	for n, h := range taps {
		ramped[n] = (float64(n) - middle) * h
	}
	fft := newPaddedFFT(k)
	spectrum, slope := fft.transform(taps), fft.transform(ramped)
	least := Stated * maxModulus(spectrum)
	delay := make([]float64, len(spectrum))
	for i, h := range spectrum {
		delay[i] = math.NaN()
		if modulus := cmplx.Abs(h); modulus > 0 && modulus >= least {
			delay[i] = middle + real(slope[i]/h)
		}
	}
	return delay
}

func maxModulus(spectrum []complex128) float64 {
	largest := 0.0
	for _, h := range spectrum {
		largest = math.Max(largest, cmplx.Abs(h))
	}
	return largest
}

// paddedFFT transforms kernels that are shorter than the transform.
type paddedFFT struct {
	fft    *fourier.FFT
	padded []float64
}

func newPaddedFFT(k int) *paddedFFT {
	if k < 2 || k%2 != 0 {
		panic(fmt.Sprintf("response: transform length %d is not an even number from 2 up", k))
	}
	return &paddedFFT{fft: fourier.NewFFT(k), padded: make([]float64, k)}
}

func (p *paddedFFT) transform(taps []float64) []complex128 {
	if len(taps) > len(p.padded) {
		panic(fmt.Sprintf("response: %d taps do not fit a transform of %d", len(taps), len(p.padded)))
	}
	clear(p.padded[copy(p.padded, taps):])
	return p.fft.Coefficients(nil, p.padded)
}

// NextPow2 returns the least power of two that is at least n; 1 for n <= 1.
func NextPow2(n int) int {
	if n <= 1 {
		return 1
	}
	return 1 << bits.Len(uint(n-1))
}
