package main

import (
	"math"
	"strings"
	"testing"

	"gonum.org/v1/gonum/dsp/fourier"
)

// A resonator passes 0 Hz with gain 1 and is half a bandwidth to each side of
// its centre 3 dB below its greatest gain (Klatt 1980, section II.A). The two
// skirts of a resonance this narrow differ by some hundredths of a decibel.
func TestResonator(t *testing.T) {
	const rate, hz, bw = 16000, 2000.0, 80.0
	var r resonator
	h := make([]float64, rate) // 1 Hz to a bin; 80 Hz dies out within 50 ms
	for n := range h {
		x := 0.0
		if n == 0 {
			x = 1
		}
		h[n] = r.step(x, hz, bw, rate)
	}
	c := fourier.NewFFT(rate).Coefficients(nil, h)
	gain := func(hz int) float64 { return dB(real(c[hz])*real(c[hz]) + imag(c[hz])*imag(c[hz])) }
	within(t, "gain at 0 Hz, dB", gain(0), 0, 1e-9)
	within(t, "lower skirt, dB", gain(1960)-gain(2000), -10*math.Log10(2), 0.1)
	within(t, "upper skirt, dB", gain(2040)-gain(2000), -10*math.Log10(2), 0.1)
}

// The error of a quantiser with triangular dither of two steps has mean 0 and
// variance 1/4 step², wherever between two steps the value lies (Lipshitz,
// Wannamaker, Vanderkooy 1992: 2/12 of dither and 1/12 of rounding). With 10⁵
// values the mean is known to 0.5/√10⁵ = 0.0016, the variance to about 0.0011:
// four times that is allowed.
func TestDither(t *testing.T) {
	for _, part := range []float64{0, 0.25, 0.5, 0.8} {
		r := scenes[0].random("a test of dither")
		off := make([]float64, 100_000)
		for n := range off {
			off[n] = float64(dithered(math.Ldexp(100+part, -15), 16, r)) - (100 + part)
		}
		within(t, "mean error, steps", mean(off), 0, 0.0064)
		within(t, "variance, steps²", variance(off), 0.25, 0.0045)
	}
}

// A sample beyond full scale is an error that names channel and frame, not a
// value that wraps.
func TestQuantiseRefusesOverload(t *testing.T) {
	s := scene{path: "overload", bits: 16, frames: 3, channels: make([]channel, 2)}
	for _, v := range []float64{1.001, -1.001, math.NaN()} {
		_, err := s.quantise([][]float64{{0, 0, 0}, {0, v, 0}})
		if err == nil || !strings.Contains(err.Error(), "channel 2, frame 1") {
			t.Errorf("value %g: error %v, want one that names channel 2, frame 1", v, err)
		}
	}
}
