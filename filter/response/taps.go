package response

import (
	"math"
	"math/bits"
	"math/cmplx"
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

// TapsAtEach writes TapsAt at each omega into h, which is as long. It gives the same
// to the last bit in half the time: two sums at once do not wait for each other.
func TapsAtEach(h []complex128, taps, omegas []float64) {
	for len(omegas) >= 2 {
		h[0], h[1] = tapsAtTwo(taps, omegas[0], omegas[1])
		h, omegas = h[2:], omegas[2:]
	}
	if len(omegas) == 1 {
		h[0] = TapsAt(taps, omegas[0])
	}
}

func tapsAtTwo(taps []float64, omega0, omega1 float64) (h0, h1 complex128) {
	sin0, cos0 := math.Sincos(omega0)
	sin1, cos1 := math.Sincos(omega1)
	var re0, im0, re1, im1 float64
	for n := len(taps) - 1; n >= 0; n-- {
		re0, im0 = re0*cos0+im0*sin0+taps[n], im0*cos0-re0*sin0
		re1, im1 = re1*cos1+im1*sin1+taps[n], im1*cos1-re1*sin1
	}
	return complex(re0, im0), complex(re1, im1)
}

// TapsGroupDelay returns the group delay in samples at bins 0..k/2 of the
// k-point transform: Re{ DFT(n h)/DFT(h) }, with n counted from the middle tap
// for the sake of accuracy. A bin more than 60 dB under the largest is NaN: not
// stated. Panics as Spectrum does.
func TapsGroupDelay(taps []float64, k int) []float64 {
	delay := make([]float64, k/2+1)
	eachTapsBin(taps, k, func(bin int, _, samples float64) { delay[bin] = samples })
	return delay
}

// eachTapsBin visits bins 0..size/2 in no order, with |H|^2 and the group delay of
// TapsGroupDelay.
func eachTapsBin(taps []float64, size int, visit func(k int, squared, delay float64)) {
	middle := float64(len(taps)-1) / 2
	h := Spectrum(taps, size)
	largest := maxModulus(h)
	NewTransform(size, len(taps)).Each(func(k int, v []complex128) {
		squared, delay := power(h[k]), math.NaN()
		if squared > 0 && squared >= Stated*Stated*largest*largest {
			delay = middle + inPhase(v[0], h[k])/squared
		}
		visit(k, squared, delay)
	}, Sequence{X: taps, Moments: true, Origin: middle})
}

// inPhase is Re{a b*}.
func inPhase(a, b complex128) float64 { return real(a)*real(b) + imag(a)*imag(b) }

func maxModulus(spectrum []complex128) float64 {
	largest := 0.0
	for _, h := range spectrum {
		largest = math.Max(largest, cmplx.Abs(h))
	}
	return largest
}

// NextPow2 returns the least power of two that is at least n; 1 for n <= 1.
func NextPow2(n int) int {
	if n <= 1 {
		return 1
	}
	return 1 << bits.Len(uint(n-1))
}
