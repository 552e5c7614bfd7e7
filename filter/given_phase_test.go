package filter

import (
	"errors"
	"math"
	"math/cmplx"
	"strings"
	"testing"

	"fettle/filter/response"
)

// A given kernel keeps its magnitude under linear and minimum phase: |H| within
// 0.1 dB, errors 80 dB under the greatest forgiven.
func TestGivenKernelChangesPhaseOnly(t *testing.T) {
	h := noise(12, 31)
	for i := range h {
		h[i] *= math.Exp(-float64(i) / 6)
	}
	for _, as := range []Realisation{Linear, Minimum} {
		p := realised(t, firChain(h), 48000, as).paths[0]
		sameMagnitude(t, string(as), h, p)
		if as == Linear && response.Symmetry(p.System.Taps, 0) != response.TypeI {
			t.Errorf("the linear kernel of %d taps is not symmetric", len(p.System.Taps))
		}
	}
}

func sameMagnitude(t *testing.T, name string, h []float64, p *Path) {
	t.Helper()
	const size = 1 << 15
	want, got := response.Spectrum(h, size), p.System.Spectrum(size)
	top := 0.0
	for _, v := range want {
		top = math.Max(top, cmplx.Abs(v))
	}
	for k := range want {
		w, g := cmplx.Abs(want[k]), cmplx.Abs(got[k])
		if allowed := (math.Pow(10, 0.1/20)-1)*w + 1e-4*top; !(math.Abs(g-w) <= allowed) {
			t.Fatalf("%s: |H| is %g where it was %g, allowed %g, at bin %d", name, g, w, allowed, k)
		}
	}
}

// What is symmetric already is linear phase as it is, even lengths too.
func TestSymmetricKernelIsKept(t *testing.T) {
	h := []float64{0.25, 0.5, 0.5, 0.25}
	p := realised(t, firChain(h), 48000, Linear).paths[0]
	if d := worstDifference(p.System.Taps, h); d != 0 {
		t.Errorf("taps became %v", p.System.Taps)
	}
}

func TestGivenKernelHasNoRecursiveForm(t *testing.T) {
	_, err := parsed(t, "name: x\n"+firChain([]float64{1, 2})).Realise(48000, IIR)
	if !errors.Is(err, ErrForRecording) && err == nil || !strings.Contains(err.Error(), "chain.yaml:3:5") || !strings.Contains(err.Error(), "phase: given") {
		t.Errorf("error %v", err)
	}
	if _, err := parsed(t, "stages: [{fir: {taps: [1, 2], phase: given}}]").Realise(48000, IIR); err != nil {
		t.Errorf("phase: given does not protect: %v", err)
	}
}

// Given sections with zeros outside the circle: minimum reflects them, linear
// follows the magnitude, given keeps them.
func TestGivenSections(t *testing.T) {
	const text = "stages: [{biquads: {sections: [[0.3, -0.9, 0.5, 1, -0.4, 0.2]]}}]"
	given := realised(t, text, 48000, Written).paths[0]
	h := response.Impulse(given.System.Sections, 256)
	for _, as := range []Realisation{Linear, Minimum} {
		sameMagnitude(t, string(as), h, realised(t, text, 48000, as).paths[0])
	}
	low := realised(t, text, 48000, Minimum).paths[0].System.Taps
	if !(low[0] > math.Abs(h[0])) {
		t.Errorf("the minimum-phase response begins with %g, the given one with %g", low[0], h[0])
	}
}

// A mask is met by every realisation: ripple and rejection measured on 2^17
// points, with nothing but rounding (1e-9) forgiven.
func TestMaskIsMetInEveryPhase(t *testing.T) {
	for _, text := range []string{
		"stages: [{lowpass: {pass: 6 kHz, stop: 7 kHz, ripple: 0.05 dB, reject: 70 dB, family: kaiser}}]",
		"stages: [{highpass: {at: 500 Hz, width: 300 Hz, reject: 60 dB, family: kaiser}}]",
		"stages: [{bandpass: {pass: [400 Hz, 3 kHz], stop: [200 Hz, 3.5 kHz], reject: 50 dB, family: kaiser}}]",
		"stages: [{bandstop: {at: [1 kHz, 2 kHz], width: 300 Hz, reject: 50 dB, family: kaiser}}]",
	} {
		for _, as := range []Realisation{Written, Linear, Minimum, IIR} {
			p := realised(t, text, 48000, as).paths[0]
			const size = 1 << 17
			mask := p.members[0].mask
			for k, h := range p.System.Spectrum(size) {
				lo, hi := mask.Bounds(float64(k) * 48000 / size)
				if a := cmplx.Abs(h); !(a >= lo-1e-9 && a <= hi+1e-9) {
					t.Errorf("%s as %q: |H| is %g at %g Hz, allowed %g to %g", text, as, a, float64(k)*48000/size, lo, hi)
					break
				}
			}
			if as == IIR && p.System.Taps != nil || as != IIR && p.System.Sections != nil {
				t.Errorf("%s as %q: %d taps, %d sections", text, as, len(p.System.Taps), len(p.System.Sections))
			}
			if e := p.TargetErrorDB(); !(e <= 1e-6) {
				t.Errorf("%s as %q: %g dB outside its mask", text, as, e)
			}
		}
	}
}
