package design

import (
	"math"
	"math/cmplx"
	"testing"

	"fettle/filter/response"
)

// TestFractionalDelay measures the promise for fractions over the whole range,
// on a grid of its own, and what happens at half the rate.
func TestFractionalDelay(t *testing.T) {
	worstDB, worstDelay, length := 0.0, 0.0, 0
	for _, frac := range []float64{-0.499, -0.4, -0.25, -0.1, -1e-3, 0, 1e-6, 0.1, 1.0 / 3, 0.49, 0.5} {
		taps, centre, err := FractionalDelay(frac)
		noError(t, err)
		length = len(taps)
		if length != 2*centre+1 {
			t.Errorf("%d taps about centre %d", length, centre)
		}
		const k = 10240
		for i := range int(0.45*k) + 1 {
			omega := 2 * math.Pi * float64(i) / k
			worstDB = math.Max(worstDB, math.Abs(toDB(cmplx.Abs(response.TapsAt(taps, omega)))))
		}
		for _, delay := range response.TapsGroupDelay(taps, 1<<14)[:7373] { // 7372/16384 = 0.44995
			off := math.Abs(delay - float64(centre) - frac)
			if !(off <= worstDelay) {
				worstDelay = off
			}
		}
		near(t, "0 Hz", compensatedSum(taps), 1, 1e-15)
		near(t, "half the rate", cmplx.Abs(response.TapsAt(taps, math.Pi)), math.Abs(math.Cos(math.Pi*frac)), 0.02)
	}
	t.Logf("%d taps: magnitude within %.4f dB, delay within %.2g samples", length, worstDB, worstDelay)
	near(t, "magnitude in dB", worstDB, 0, 0.01)
	near(t, "delay in samples", worstDelay, 0, 1e-3)
}

// TestFractionalDelayOfSine shifts a sine of 0.4 of the rate and compares with
// the sine itself at the shifted instants.
func TestFractionalDelayOfSine(t *testing.T) {
	const frac, omega = 0.37, 0.8 * math.Pi
	taps, centre, err := FractionalDelay(frac)
	noError(t, err)
	for n := 200; n < 220; n++ {
		sum := 0.0
		for k, h := range taps {
			sum += h * math.Sin(omega*float64(n-k))
		}
		near(t, "sample", sum, math.Sin(omega*(float64(n-centre)-frac)), 1.5e-3) // 0.01 dB is 1.15e-3
	}
}

func TestFractionalDelayErrors(t *testing.T) {
	for _, frac := range []float64{-0.5, 0.51, math.NaN()} {
		_, _, err := FractionalDelay(frac)
		wantError(t, err, "is not above -0.5 and at most 0.5")
	}
}
