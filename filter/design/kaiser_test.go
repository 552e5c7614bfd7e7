package design

import (
	"math"
	"math/cmplx"
	"testing"

	"fettle/filter/response"
)

// TestKaiser: every mask is met by an odd symmetric kernel, and two taps fewer
// do not meet it with any window shape of a fine scan.
func TestKaiser(t *testing.T) {
	for _, m := range masks() {
		taps, err := Kaiser(m)
		noError(t, err)
		got := MeasureTaps(taps, m)
		t.Logf("%v: %d taps, ripple %.5f dB of %g, rejection %.2f dB of %g", m.Kind, len(taps), got.RippleDB, m.RippleDB, got.RejectDB, m.RejectDB)
		if kind := response.Symmetry(taps, 1e-15); kind != response.TypeI || !got.Meets(m) {
			t.Errorf("%v: %v, %+v for %+v", m.Kind, kind, got, m)
		}
		withinBounds(t, m.Kind.String(), m, func(omega float64) float64 { return cmplx.Abs(response.TapsAt(taps, omega)) })
		checkSum(t, m.Kind, taps)
		if len(taps) > 1300 {
			continue // the scan would take seconds
		}
		for beta := 2.0; beta < 11; beta += 0.05 {
			if MeasureTaps(kaiserKernel(m, len(taps)-2, beta), m).Meets(m) {
				t.Errorf("%v: %d taps meet it too, with beta %g", m.Kind, len(taps)-2, beta)
				break
			}
		}
	}
}

// checkSum: the gain at 0 Hz is 0 or 1 by construction.
func checkSum(t *testing.T, kind Kind, taps []float64) {
	t.Helper()
	want := 0.0
	if kind.passesDC() {
		want = 1
	}
	near(t, kind.String()+" sum of taps", compensatedSum(taps), want, 1e-15)
}

// TestKaiserMiddle: a transition is at -6 dB in its middle, where the ideal
// response jumps from 0 to 1; the window is wide against nothing but the
// transition, so this holds to about the ripple.
func TestKaiserMiddle(t *testing.T) {
	m := MaskAround(Bandpass, 48000, 400, 0.05, 80, 1000, 5000)
	if m.Pass != [2]float64{1200, 4800} || m.Stop != [2]float64{800, 5200} {
		t.Fatalf("the mask lies wrong: %+v", m)
	}
	taps, err := Kaiser(m)
	noError(t, err)
	for _, hz := range []float64{1000, 5000} {
		near(t, "middle", toDB(cmplx.Abs(response.TapsAt(taps, radians(hz, m.Rate)))), -6.02, 0.01)
	}
}

// TestKaiserHighpassNull: a 1001-tap class of high-pass, which windowing alone
// leaves 3e-4 above nothing at 0 Hz.
func TestKaiserHighpassNull(t *testing.T) {
	m := MaskAround(Highpass, 48000, 100, 0.1, 60, 150)
	taps, err := Kaiser(m)
	noError(t, err)
	near(t, "0 Hz", real(response.TapsAt(taps, 0)), 0, 1e-12)
	near(t, "half the rate", cmplx.Abs(response.TapsAt(taps, math.Pi)), 1, 1e-3)
}

// TestUnequalTransitions: the narrower transition governs.
func TestUnequalTransitions(t *testing.T) {
	m := Mask{Kind: Bandpass, Pass: [2]float64{1000, 4000}, Stop: [2]float64{800, 8000}, RippleDB: 0.1, RejectDB: 60, Rate: 48000}
	if w := m.Narrowest(); w != 200 {
		t.Errorf("narrowest is %g Hz, want 200 Hz", w)
	}
	wide, err := Kaiser(m)
	noError(t, err)
	m.Stop[1] = 4200
	equal, err := Kaiser(m)
	noError(t, err)
	if !(len(wide) <= len(equal)) {
		t.Errorf("%d taps with one wide transition, %d with none", len(wide), len(equal))
	}
}

func TestMaskErrors(t *testing.T) {
	good := masks()[0]
	cases := []struct {
		change func(m *Mask)
		says   []string
	}{
		{func(m *Mask) { m.RippleDB = -0.1 }, []string{"ripple of -0.1 dB"}},
		{func(m *Mask) { m.RippleDB = math.NaN() }, []string{"ripple of NaN dB"}},
		{func(m *Mask) { m.RejectDB = -80 }, []string{"rejection of -80 dB", "positive"}},
		{func(m *Mask) { m.RippleDB = 90 }, []string{"rejection of 80 dB is not above the ripple of 90 dB"}},
		{func(m *Mask) { m.Pass, m.Stop = m.Stop, m.Pass }, []string{"pass edge 14000 Hz must lie below the stop edge 12000 Hz"}},
		{func(m *Mask) { m.Kind = Highpass }, []string{"stop edge 14000 Hz must lie below the pass edge 12000 Hz"}},
		{func(m *Mask) { m.Stop[0] = 24000 }, []string{"stop edge: 24000 Hz is not below half the sample rate (24000 Hz)"}},
		{func(m *Mask) { m.Pass[0] = 0 }, []string{"pass edge: 0 Hz is not above 0 Hz"}},
		{func(m *Mask) { m.Pass[1] = 13000 }, []string{"one pass and one stop edge"}},
		{func(m *Mask) { m.Kind = Bandpass }, []string{"pass edge: 0 Hz"}},
		{func(m *Mask) { m.Kind = 7 }, []string{"Kind(7)"}},
		{func(m *Mask) { m.Stop[0] = 12000.01; m.RejectDB = 120 }, []string{"more than 4194304", "widen the transition, lower the rejection, or use iir"}},
	}
	for _, c := range cases {
		m := good
		c.change(&m)
		_, err := Kaiser(m)
		wantError(t, err, c.says...)
	}
}

// TestBounds walks across the edges of all kinds.
func TestBounds(t *testing.T) {
	pass := [2]float64{fromDB(-1), fromDB(1)}
	stop, free := [2]float64{0, fromDB(-40)}, [2]float64{0, fromDB(1)}
	cases := []struct {
		kind       Kind
		passEdges  [2]float64
		stopEdges  [2]float64
		at100Steps [][2]float64 // bounds at 100, 200, ... Hz
	}{
		{Lowpass, [2]float64{200}, [2]float64{400}, [][2]float64{pass, pass, free, stop, stop}},
		{Highpass, [2]float64{400}, [2]float64{200}, [][2]float64{stop, stop, free, pass, pass}},
		{Bandpass, [2]float64{300, 400}, [2]float64{100, 600}, [][2]float64{stop, free, pass, pass, free, stop}},
		{Bandstop, [2]float64{100, 600}, [2]float64{300, 400}, [][2]float64{pass, free, stop, stop, free, pass}},
	}
	for _, c := range cases {
		m := Mask{Kind: c.kind, Pass: c.passEdges, Stop: c.stopEdges, RippleDB: 1, RejectDB: 40, Rate: 2000}
		noError(t, m.Validate())
		for i, want := range c.at100Steps {
			lo, hi := m.Bounds(float64(100 * (i + 1)))
			if lo != want[0] || hi != want[1] {
				t.Errorf("%v at %d Hz: %g to %g, want %v", c.kind, 100*(i+1), lo, hi, want)
			}
		}
	}
}

// TestMeasureSeesNarrowPeaks: a bell a hertz wide in the passband, which an
// even grid of 2^14 points passes over, is measured at its full gain.
func TestMeasureSeesNarrowPeaks(t *testing.T) {
	m := masks()[0]
	bell := section(t)(Bell(m.Rate, 777.7, 1, 2000))
	near(t, "ripple", MeasureSections([]response.Section{bell}, m).RippleDB, 1, 1e-3)
}

func BenchmarkKaiser4095(b *testing.B) {
	m := Mask{Kind: Lowpass, Pass: [2]float64{12000}, Stop: [2]float64{12075.4}, RippleDB: 0.01, RejectDB: 100, Rate: 48000}
	for b.Loop() {
		taps, err := Kaiser(m)
		if err != nil {
			b.Fatal(err)
		}
		b.ReportMetric(float64(len(taps)), "taps")
	}
}

// TestLongKaiser goes beyond the lengths that are searched to the last tap: a
// high-pass between 19 and 22 Hz still meets its mask.
func TestLongKaiser(t *testing.T) {
	m := Mask{Kind: Highpass, Pass: [2]float64{22}, Stop: [2]float64{19}, RippleDB: 0.1, RejectDB: 70, Rate: 48000}
	taps, err := Kaiser(m)
	noError(t, err)
	got := MeasureTaps(taps, m)
	t.Logf("%d taps, %+v", len(taps), got)
	if !(len(taps) > exactTaps) || !got.Meets(m) {
		t.Errorf("%d taps, %+v", len(taps), got)
	}
}
