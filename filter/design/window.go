package design

import (
	"fmt"
	"math"
)

// besselI0 is the modified Bessel function of the first kind and order zero by
// its power series, whose terms are all positive: full precision wherever a
// window needs it (|x| up to a few hundred). Abramowitz & Stegun (1964), 9.6.12.
func besselI0(x float64) float64 {
	quarter := x * x / 4
	sum, term := 1.0, 1.0
	for k := 1.0; term > sum*1e-18; k++ {
		term *= quarter / (k * k)
		sum += term
	}
	return sum
}

// KaiserWindow returns the symmetric window of n points with its middle at 1:
//
//	w[i] = I0(beta sqrt(1 - (2i/(n-1) - 1)^2)) / I0(beta)
//
// n >= 0 (one point is 1), beta 0 (rectangular) to 500. Source: Kaiser (1974).
func KaiserWindow(n int, beta float64) []float64 {
	w := make([]float64, n)
	for j, v := range kaiserHalf(n, beta) {
		w[n/2+j], w[(n-1)/2-j] = v, v
	}
	return w
}

// kaiserHalf is the second half of the window, the middle of an odd one included.
func kaiserHalf(n int, beta float64) []float64 {
	half := make([]float64, (n+1)/2)
	last, norm := float64(n-1), besselI0(beta)
	for j := range half {
		i := float64((n-1)/2 - j)
		inside := 2 * math.Sqrt(i*(last-i)) / last
		half[j] = besselI0(beta*inside) / norm
	}
	if n == 1 {
		half[0] = 1
	}
	return half
}

// KaiserBeta returns the shape parameter for ripples of attenuationDB below 1
// in passband and stopband alike: 0.1102 above 50 dB,
// 0.5842 (A-21)^0.4 + 0.07886 from 21 dB, else 0. Source: Kaiser (1974);
// Oppenheim & Schafer, section on the Kaiser window.
func KaiserBeta(attenuationDB float64) float64 {
	a := attenuationDB
	switch {
	case a > 50:
		return 0.1102 * (a - 8.7)
	case a >= 21:
		return 0.5842*math.Pow(a-21, 0.4) + 0.07886*(a-21)
	}
	return 0
}

// KaiserOrder returns the estimated order, taps less one, not rounded:
// (A - 8)/(2.285 width), width in radians per sample and above 0; 0 for A
// under 8 dB. It is an estimate: Kaiser measures. Source as KaiserBeta.
func KaiserOrder(attenuationDB, width float64) float64 {
	return math.Max(0, (attenuationDB-8)/(2.285*width))
}

// WindowedSinc returns n taps of the ideal kind cut at the edges (Hz, -6 dB)
// and weighted with a Kaiser window of shape beta, 0 to 500. See SincUnder.
//
// Errors: beta outside 0..500; those of SincUnder.
func WindowedSinc(kind Kind, n int, beta float64, scale bool, rate float64, edges ...float64) ([]float64, error) {
	if !(beta >= 0 && beta <= 500) {
		return nil, fmt.Errorf("windowed %v: a window beta of %g is not between 0 and 500", kind, beta)
	}
	return SincUnder(KaiserWindow(max(n, 0), beta), kind, scale, rate, edges...)
}

// SincUnder returns the ideal kind cut at the edges (Hz, -6 dB) and weighted
// with a symmetric window, one tap for each of its points. With scale, the gain
// is exactly 1 at 0 Hz for a low-pass and band-stop, at half the rate for a
// high-pass and midway between the edges for a band-pass. The delay is (n-1)/2
// samples.
//
// Errors: an empty window; edges as for Butterworth; an even length for a
// high-pass or band-stop, whose forced zero at half the rate (linear-phase type
// II) contradicts the kind. Source: Oppenheim & Schafer, section on filter
// design by windowing.
func SincUnder(window []float64, kind Kind, scale bool, rate float64, edges ...float64) ([]float64, error) {
	err := checkEdges(kind, rate, edges)
	if err == nil {
		err = CheckForcedZeros(kind, len(window), false)
	}
	if err != nil {
		return nil, fmt.Errorf("windowed %v: %w", kind, err)
	}
	taps := make([]float64, len(window))
	for _, band := range passbands(kind, rate, edges) {
		addIdeal(taps, window, band[1], 1)
		addIdeal(taps, window, band[0], -1)
	}
	if scale {
		divide(taps, gainAt(taps, scalingFrequency(kind, rate, edges)))
	}
	return taps, nil
}

// passbands lists the bands passed, as fractions of half the rate.
func passbands(kind Kind, rate float64, edges []float64) [][2]float64 {
	at := func(i int) float64 { return edges[i] / (rate / 2) }
	switch kind {
	case Lowpass:
		return [][2]float64{{0, at(0)}}
	case Highpass:
		return [][2]float64{{at(0), 1}}
	case Bandpass:
		return [][2]float64{{at(0), at(1)}}
	}
	return [][2]float64{{0, at(0)}, {at(1), 1}}
}

// addIdeal adds sign times the windowed ideal low-pass of the given cutoff, a
// fraction of half the rate; 0 adds nothing.
func addIdeal(taps, window []float64, cutoff, sign float64) {
	middle := float64(len(taps)-1) / 2
	for i := range taps {
		taps[i] += sign * window[i] * cutoff * sinc(cutoff*(float64(i)-middle))
	}
}

// sinc is sin(pi x)/(pi x), exactly 0 at the other whole numbers.
func sinc(x float64) float64 {
	if x == 0 {
		return 1
	}
	if x == math.Trunc(x) {
		return 0
	}
	return math.Sin(math.Pi*x) / (math.Pi * x)
}

func scalingFrequency(kind Kind, rate float64, edges []float64) float64 {
	switch kind {
	case Highpass:
		return math.Pi
	case Bandpass:
		return math.Pi * (edges[0] + edges[1]) / rate
	}
	return 0
}

// gainAt returns the real gain of a symmetric kernel.
func gainAt(taps []float64, omega float64) float64 {
	middle := float64(len(taps)-1) / 2
	sum := 0.0
	for i, h := range taps {
		sum += h * math.Cos(omega*(float64(i)-middle))
	}
	return sum
}

func divide(taps []float64, by float64) {
	for i := range taps {
		taps[i] /= by
	}
}
