package filter

import (
	"math"
	"math/cmplx"
	"strings"
	"testing"

	"fettle/filter/design"
)

var evenChains = map[string]string{
	"highpass 4":       "stages: [{highpass: {at: 70 Hz, order: 4}}]",
	"lowpass 6":        "stages: [{lowpass: {at: 3 kHz, order: 6}}]",
	"bandpass 2":       "stages: [{bandpass: {at: [300 Hz, 3400 Hz], order: 2}}]",
	"bandstop 2":       "stages: [{bandstop: {at: [900 Hz, 1100 Hz], order: 2}}]",
	"notch":            "stages: [{notch: {at: 100 Hz, width: 8 Hz}}]",
	"dc":               "stages: [{dc: {at: 10 Hz}}]",
	"hum":              "stages: [{hum: {mains: 60 Hz, harmonics: 3, width: 6 Hz}}]",
	"linkwitz-riley 4": "stages: [{lowpass: {at: 2 kHz, order: 4, family: linkwitz-riley}}]",
	"bell":             "stages: [{bell: {at: 1 kHz, gain: 6 dB, q: 2}}]",
}

// Forward and backward: no phase at all, no latency, the corners where they
// were asked for, and a deviation from the target that is printed as it is:
// measured here from an impulse that went through Apply.
func TestZeroPhase(t *testing.T) {
	for name, text := range evenChains {
		const rate = 16000
		f := realised(t, text, rate, Zero)
		p := f.paths[0]
		if l := f.Latency(p); !(math.Abs(l.Exact) <= 1e-6) || l.Removed != 0 {
			t.Errorf("%s: latency %+v", name, l)
		}
		before, after := f.Reach(p)
		x := make([]float64, before+1+after)
		x[before] = 1
		h := applied(t, f, 1, x, 999)
		for n := 1; n <= min(before, after); n++ {
			if d := math.Abs(h[before+n] - h[before-n]); !(d <= 2e-7) { // -140 dB each way
				t.Fatalf("%s: %d samples from the instant the sides differ by %g", name, n, d)
			}
		}
		iir := realised(t, text, rate, IIR).paths[0]
		worst := 0.0
		for k := 1; k < 4000; k++ {
			omega := math.Pi * float64(k) / 4000
			got, want := cmplx.Abs(dft(h, omega)), cmplx.Abs(iir.System.At(omega))
			if insideCusp(iir.members, omega) {
				continue
			}
			worst = math.Max(worst, (math.Abs(got-want)-math.Pow(10, design.FloorDB/20.0))/want)
			if modelled := cmplx.Abs(p.System.At(omega)); !(math.Abs(got-modelled) <= 1e-6) {
				t.Fatalf("%s: at %g rad the path says %g and does %g", name, omega, modelled, got)
			}
		}
		measured := 20 * math.Log10(1+worst)
		// The two look at different points of a ripple that is steep in dB.
		if printed := p.TargetErrorDB(); !(math.Abs(printed-measured) <= 0.02) {
			t.Errorf("%s: off target by %g dB, prints %g", name, measured, printed)
		}
		t.Logf("%s: off target by %.3f dB", name, p.TargetErrorDB())
	}
}

func dft(h []float64, omega float64) (sum complex128) {
	turn := cmplx.Rect(1, -omega)
	for n := len(h) - 1; n >= 0; n-- {
		sum = sum*turn + complex(h[n], 0)
	}
	return sum
}

// -3 dB stays where it was asked for (-6 dB for Linkwitz-Riley), the passband
// droops by at most 0.7 dB, and the stopband ends 7.7 dB higher: the design's
// figures for an even-order Butterworth run both ways.
func TestZeroPhaseCorners(t *testing.T) {
	for _, c := range []struct {
		chain string
		hz    float64
		db    float64
	}{
		{"highpass 4", 70, -3.0103}, {"lowpass 6", 3000, -3.0103}, {"bandpass 2", 300, -3.0103}, {"bandpass 2", 3400, -3.0103},
		{"bandstop 2", 900, -3.0103}, {"dc", 10, -3.0103}, {"notch", 96.08, -3.0103}, {"linkwitz-riley 4", 2000, -6.0206}, {"bell", 1000, 6},
	} {
		p := realised(t, evenChains[c.chain], 48000, Zero).paths[0]
		if got := 20 * math.Log10(cmplx.Abs(p.System.At(2*math.Pi*c.hz/48000))); !(math.Abs(got-c.db) <= 0.01) {
			t.Errorf("%s: %.4f dB at %g Hz, want %g", c.chain, got, c.hz, c.db)
		}
	}
	zero := realised(t, evenChains["highpass 4"], 48000, Zero).paths[0]
	iir := realised(t, evenChains["highpass 4"], 48000, IIR).paths[0]
	for hz := 1.0; hz < 20000; hz *= 1.05 {
		omega := 2 * math.Pi * hz / 48000
		more := 20 * math.Log10(cmplx.Abs(zero.System.At(omega))/cmplx.Abs(iir.System.At(omega)))
		if hz < 7 && !(math.Abs(more-7.66) <= 0.1) || hz > 70 && !(more >= -0.7 && more <= 0.001) {
			t.Errorf("at %g Hz %g dB above the Butterworth", hz, more)
		}
	}
	if e := realised(t, evenChains["linkwitz-riley 4"], 48000, Zero).paths[0].TargetErrorDB(); !(e <= 1e-6) {
		t.Errorf("a Linkwitz-Riley of order 4 is off by %g dB; it is two Butterworths, exactly", e)
	}
}

// Every edge mode and split goes through the same Apply; a click train comes
// out in place.
func TestZeroPhaseKeepsFrames(t *testing.T) {
	f := realised(t, "phase: zero\nstages: [{highpass: {at: 120 Hz, order: 2}}, {bell: {at: 2 kHz, gain: 3 dB, q: 1}}]", 16000, Written)
	for _, frames := range []int{1, 500, 30000} {
		x, _ := clicks(frames, 400)
		y := applied(t, f, 1, x, 777)
		if lag := correlationPeak(x, y); lag != 0 || len(y) != frames {
			t.Errorf("%d frames: %d came out, best at lag %d", frames, len(y), lag)
		}
	}
}

func TestZeroPhaseRefusals(t *testing.T) {
	for text, words := range map[string]string{
		"stages: [{highpass: {at: 70 Hz, order: 3}}]":                                    "use order 4",
		"stages: [{lowpass: {at: 70 Hz, order: 4, family: bessel}}]":                     "bessel",
		"stages: [{fir: {taps: [1, 2]}}]":                                                "phase: given",
		"stages: [{biquads: {sections: [[1, 0, 0, 1, -0.5, 0]]}}]":                       "squaring",
		"stages: [{lowpass: {at: 70 Hz, order: 5, family: chebyshev1, ripple: 0.5 dB}}]": "use order 6",
	} {
		if _, err := parsed(t, text).Realise(48000, Zero); err == nil || !strings.Contains(err.Error(), words) || !strings.Contains(err.Error(), "chain.yaml:1:") {
			t.Errorf("%s: %v", text, err)
		}
	}
	if _, err := parsed(t, "stages: [{fir: {taps: [1, 2], phase: given}}]").Realise(48000, Zero); err != nil {
		t.Errorf("phase: given does not protect: %v", err)
	}
}
