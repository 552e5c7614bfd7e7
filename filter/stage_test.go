package filter

import (
	"math"
	"math/cmplx"
	"strings"
	"testing"
)

// gainAt is a path's gain in dB.
func gainAt(p *Path, hz, rate float64) float64 {
	return 20 * math.Log10(cmplx.Abs(p.System.At(2*math.Pi*hz/rate)))
}

// Disc replay by name and by times, against the table of IEC 60098 (values
// recomputed from its time constants, as listed in design/testdata/replay), and
// its inverse, which takes it back.
func TestReplayStage(t *testing.T) {
	table := map[float64]float64{20: 19.274, 100: 13.088, 1000: 0, 10000: -13.734, 20000: -19.620}
	for _, text := range []string{"{curve: riaa}", "{times: [3180 us, 318 us, 75 us]}"} {
		for _, rate := range []int{44100, 96000} {
			p := realised(t, "stages: [{replay: "+text+"}]", rate, IIR).paths[0]
			for hz, want := range table {
				if got := gainAt(p, hz, float64(rate)); !(math.Abs(got-want) <= 0.01) {
					t.Errorf("%s at %d Hz: %.4f dB at %g Hz, want %.3f", text, rate, got, hz, want)
				}
			}
		}
	}
	both := realised(t, "stages: [{replay: {curve: riaa}}, {replay: {curve: riaa, inverse: true}}]", 48000, IIR).paths[0]
	for hz := range table {
		if got := gainAt(both, hz, 48000); !(math.Abs(got) <= 1e-6) {
			t.Errorf("there and back: %g dB at %g Hz", got, hz)
		}
	}
	if notes := strings.Join(both.Notes, "\n"); !strings.Contains(notes, "inverse replay") || !strings.Contains(notes, "dB of the analogue curve") {
		t.Errorf("notes: %s", notes)
	}
	memory := realised(t, "stages: [{replay: {curve: fm-50}}]", 48000, IIR).paths[0]
	if !strings.Contains(strings.Join(memory.Notes, ""), "from memory") {
		t.Errorf("notes of a curve from memory: %q", memory.Notes)
	}
}

// A matched shelf follows its analogue prototype where the cookbook's is
// cramped: the analogue shelf (s^2 + sqrt(A)/Q s + A)A / (A s^2 + sqrt(A)/Q s + 1)
// of the Audio EQ Cookbook, high shelf with s turned, evaluated here.
func TestMatchedStage(t *testing.T) {
	const at, gain, q, rate = 12000.0, 6.0, 0.7, 44100.0
	a := math.Pow(10, gain/40)
	analogue := func(hz float64) float64 {
		s := complex(0, hz/at)
		k := complex(math.Sqrt(a)/q, 0)
		num := complex(a, 0) * (complex(a, 0)*s*s + k*s + 1)
		return 20 * math.Log10(cmplx.Abs(num/(s*s+k*s+complex(a, 0))))
	}
	worst := func(text string) (db float64) {
		p := realised(t, "stages: [{highshelf: {at: 12 kHz, gain: 6 dB, q: 0.7"+text+"}}]", rate, IIR).paths[0]
		for hz := 100.0; hz < 20000; hz *= 1.02 {
			db = math.Max(db, math.Abs(gainAt(p, hz, rate)-analogue(hz)))
		}
		return db
	}
	plain, matched := worst(""), worst(", matched: true")
	t.Logf("off the analogue shelf: %.3f dB, matched %.3f dB", plain, matched)
	if !(matched < plain/4) {
		t.Errorf("off the analogue shelf by %g dB matched, %g dB plain", matched, plain)
	}
}

// A comb takes out every harmonic to its depth and leaves the middle between
// them alone; what is above half the rate is left out and said to be.
func TestHumStage(t *testing.T) {
	for _, as := range []Realisation{Linear, Minimum, IIR, Zero} {
		p := realised(t, "stages: [{hum: {mains: 50 Hz, harmonics: 5, width: 4 Hz}}]", 8000, as).paths[0]
		for k := 1.0; k <= 5; k++ {
			if got := gainAt(p, 50*k, 8000); !(got <= -39.8) {
				t.Errorf("%s: %g dB at %g Hz, want -40", as, got, 50*k)
			}
			// Two neighbours at a distance of 25 Hz each take about 0.03 dB.
			if got := gainAt(p, 50*k+25, 8000); !(got >= -0.25 && got <= 0.1) {
				t.Errorf("%s: %g dB at %g Hz, between two notches", as, got, 50*k+25)
			}
		}
	}
	p := realised(t, "stages: [{hum: {mains: 50 Hz, harmonics: 20, ring: 500 ms}}]", 1000, IIR).paths[0]
	if len(p.System.Sections) != 9 || len(p.Warnings) != 1 || !strings.Contains(p.Warnings[0], "10 to 20") {
		t.Errorf("%d sections; %q", len(p.System.Sections), p.Warnings)
	}
	// ln(1000)/(pi 0.5 s) = 4.398 Hz: measurement.md's product of width and ring, 2.199.
	if got := gainAt(p, 50+4.3977/2, 1000); !(math.Abs(got+3.0103) <= 0.1) {
		t.Errorf("a ring of 500 ms: %g dB at half its width from the notch", got)
	}
}

// Every family by order, at its own kind of corner, and by mask.
func TestFamilies(t *testing.T) {
	for _, c := range []struct {
		text   string
		hz, db float64
	}{
		{"highpass: {at: 500 Hz, order: 5}", 500, -3.0103},
		{"highpass: {at: 500 Hz, order: 5, family: bessel}", 500, -3.0103},
		{"bandpass: {at: 500 Hz, q: 4}", 500, 0},
		{"lowpass: {at: 500 Hz, order: 4, family: linkwitz-riley}", 500, -6.0206},
		{"lowpass: {at: 500 Hz, order: 5, family: chebyshev1, ripple: 0.5 dB}", 500, -0.5},
		{"lowpass: {at: 500 Hz, order: 5, family: chebyshev2, reject: 50 dB}", 500, -50},
		{"bandpass: {at: [500 Hz, 2 kHz], order: 3, family: elliptic, ripple: 0.5 dB, reject: 50 dB}", 2000, -0.5},
		{"lowpass: {at: 500 Hz, width: 100 Hz, reject: 60 dB, family: kaiser}", 500, -6.02},
	} {
		p := realised(t, "stages: [{"+c.text+"}]", 16000, Written).paths[0]
		if got := gainAt(p, c.hz, 16000); !(math.Abs(got-c.db) <= 0.02) {
			t.Errorf("%s: %.4f dB at %g Hz, want %g", c.text, got, c.hz, c.db)
		}
	}
	const mask = "lowpass: {pass: 2 kHz, stop: 3 kHz, ripple: 0.2 dB, reject: 60 dB, family: "
	for _, family := range families {
		if family == "bessel" || family == "linkwitz-riley" {
			continue // too slow to fall for this mask, which is an error of its own
		}
		for _, as := range []Realisation{Written, Linear, Minimum} {
			p := realised(t, "stages: [{"+mask+family+"}}]", 16000, as).paths[0]
			// Kernels for a mask are plus and minus; a classical curve counts down
			// from 0 dB, and realisations keep it to 0.1 dB and -80 dB.
			for hz := 0.0; hz < 8000; hz += 7 {
				got := gainAt(p, hz, 16000)
				if hz <= 2000 && !(got >= -0.3 && got <= 0.3) || hz >= 3000 && !(got <= -59) {
					t.Errorf("%s as %q: %g dB at %g Hz", family, as, got, hz)
					break
				}
			}
		}
	}
	if _, err := Parse([]byte("stages: [{"+mask+"bessel}}]"), "c.yaml"); err == nil {
		t.Error("a bessel filter for a steep mask is no error")
	}
}
