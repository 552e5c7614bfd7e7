package figures

import (
	"math"
	"testing"
)

// A comb of eight notches 2 Hz wide with zero phase, on the 2^19 points of an independent trial of
// the definitions, which gives -38.8 dB beyond 5 ms: more than the high-pass at 70 Hz, and that
// more than the band-pass from 300 Hz (see TestEarlyEnergyReference).
func TestEarlyEnergyOfHumComb(t *testing.T) {
	const size = 1 << 19
	h := make([]complex128, size/2+1)
	for k := range h {
		f, gain := float64(k)*rate48/size, 1.0
		for i := 1.0; i <= 8; i++ {
			off := f - 50*i
			gain *= math.Abs(off) / math.Hypot(off, 1)
		}
		h[k] = complex(gain, 0)
	}
	x := inverse(h, size)
	comb := append(x[size/2:len(x):len(x)], x[:size/2]...)
	got := newProfile(comb, rate48).early(0.005)
	t.Logf("%.2f dB", got)
	within(t, "beyond 5 ms, white", got, -38.8, 0.05)
	if next := highPassLinear().PreRing.White.Beyond[1]; !(got > next) {
		t.Errorf("the comb's %.1f dB are not above the high-pass's %.1f", got, next)
	}
}
