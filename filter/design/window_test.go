package design

import (
	"fmt"
	"math"
	"testing"
)

// TestBesselI0 compares with scipy.special.i0, whose 15 printed digits are good
// to a relative 5e-15.
func TestBesselI0(t *testing.T) {
	for _, c := range loadFixtures(t).Bessel {
		near(t, fmt.Sprintf("I0(%g)", c.X), besselI0(c.X)/c.I0, 1, 6e-15)
	}
}

// TestKaiserWindow compares with scipy.signal.windows.kaiser.
func TestKaiserWindow(t *testing.T) {
	for _, c := range loadFixtures(t).Windows {
		compareTaps(t, fmt.Sprintf("n %d beta %g", c.N, c.Beta), KaiserWindow(c.N, c.Beta), c.Taps, 1e-12)
	}
	if len(KaiserWindow(0, 3)) != 0 {
		t.Error("no points were asked for")
	}
}

// TestWindowedSinc compares with scipy.signal.firwin.
func TestWindowedSinc(t *testing.T) {
	for _, c := range loadFixtures(t).Sincs {
		taps, err := WindowedSinc(kindNamed(t, c.Kind), c.N, c.Beta, c.Scale, c.Rate, c.Edges...)
		noError(t, err)
		compareTaps(t, fmt.Sprintf("%s %d", c.Kind, c.N), taps, c.Taps, 1e-10)
	}
}

func compareTaps(t *testing.T, name string, got, want []float64, tol float64) {
	t.Helper()
	if len(got) != len(want) {
		t.Errorf("%s: %d taps, want %d", name, len(got), len(want))
		return
	}
	for i := range got {
		near(t, fmt.Sprintf("%s tap %d", name, i), got[i], want[i], tol)
	}
}

// TestKaiserFormulas: beta for seven attenuations (recomputed with
// scipy.signal.kaiser_beta, five decimals).
func TestKaiserFormulas(t *testing.T) {
	for a, want := range map[float64]float64{15: 0, 30: 2.11662, 40: 3.39532, 50: 4.53351, 60: 5.65326, 65: 6.20426, 80: 7.85726, 100: 10.06126} {
		near(t, fmt.Sprintf("beta(%g dB)", a), KaiserBeta(a), want, 5e-6)
	}
	near(t, "order", KaiserOrder(60, 0.2*math.Pi), 36.2, 0.05)
	near(t, "high-pass order", KaiserOrder(33.56, 0.15*math.Pi), 23.7, 0.05)
	near(t, "no attenuation", KaiserOrder(5, 1), 0, 0)
}

// TestTextbookKaiser is the worked example of Oppenheim & Schafer (section on
// the Kaiser window; edges 0.4 pi and 0.6 pi, ripples 0.01 and 0.001, 38 taps,
// from memory). The formula's own kernel errs by 0.00113 in the passband and
// 0.00096 in the stopband, recomputed with SciPy, so it misses 0.001.
func TestTextbookKaiser(t *testing.T) {
	taps, err := WindowedSinc(Lowpass, 38, KaiserBeta(60), false, 2, 0.5)
	noError(t, err)
	pass, stop := 0.0, 0.0
	for i := range 10001 {
		omega := math.Pi * float64(i) / 10000
		gain := gainAt(taps, omega)
		if omega <= 0.4*math.Pi {
			pass = math.Max(pass, math.Abs(gain-1))
		} else if omega >= 0.6*math.Pi {
			stop = math.Max(stop, math.Abs(gain))
		}
	}
	near(t, "passband error", pass, 0.00113, 5e-6)
	near(t, "stopband error", stop, 0.00096, 5e-6)
}

func TestWindowedSincErrors(t *testing.T) {
	try := func(kind Kind, n int, beta float64, edges ...float64) error {
		_, err := WindowedSinc(kind, n, beta, false, 48000, edges...)
		return err
	}
	wantError(t, try(Highpass, 128, 5, 1000), "highpass of even length", "forced zero at half the sample rate (type II)", "129 in place of 128")
	wantError(t, try(Bandstop, 128, 5, 1000, 2000), "forced zero")
	wantError(t, try(Lowpass, 0, 5, 1000), "0 taps")
	wantError(t, try(Lowpass, 11, -1, 1000), "beta of -1")
	wantError(t, try(Lowpass, 11, 1, 24000), "24000 Hz is not below half the sample rate")
}
