package design

import (
	"math/cmplx"
	"strings"
	"testing"

	"fettle/filter/response"

	"pgregory.net/rapid"
)

// metAndShort checks a designer of kernels for masks: type I, the mask met as
// measured, and not longer than so many times the Kaiser kernel.
func metAndShort(t *testing.T, name string, m Mask, build func(Mask) ([]float64, error), times float64) {
	t.Helper()
	taps, err := build(m)
	if err != nil {
		t.Errorf("%s: %v", name, err)
		return
	}
	kaiser, err := Kaiser(m)
	noError(t, err)
	got := MeasureTaps(taps, m)
	t.Logf("%s %v: %d taps, kaiser %d, ripple %.5f dB of %g, rejection %.3f dB of %g", name, m.Kind, len(taps), len(kaiser), got.RippleDB, m.RippleDB, got.RejectDB, m.RejectDB)
	if kind := response.Symmetry(taps, 0); kind != response.TypeI || !got.Meets(m) {
		t.Errorf("%s: %v, %+v for %+v", name, kind, got, m)
	}
	if !(float64(len(taps)) <= times*float64(len(kaiser))) {
		t.Errorf("%s: %d taps where kaiser takes %d, allowed %g times", name, len(taps), len(kaiser), times)
	}
	withinBounds(t, name, m, func(omega float64) float64 { return cmplx.Abs(response.TapsAt(taps, omega)) })
}

// shortMasks are masks of all kinds that take some hundred taps.
func shortMasks() []Mask {
	return []Mask{
		MaskAround(Lowpass, 48000, 1200, 0.1, 80, 12000),
		MaskAround(Highpass, 48000, 700, 0.05, 60, 1000),
		MaskAround(Bandpass, 44100, 900, 0.2, 70, 2000, 9000),
		MaskAround(Bandstop, 44100, 900, 0.2, 50, 2000, 9000),
		{Kind: Bandpass, Pass: [2]float64{1000, 4000}, Stop: [2]float64{400, 6000}, RippleDB: 0.1, RejectDB: 60, Rate: 48000},
		{Kind: Bandstop, Pass: [2]float64{5000, 7000}, Stop: [2]float64{5950, 6050}, RippleDB: 0.5, RejectDB: 40, Rate: 48000},
		{Kind: Lowpass, Pass: [2]float64{4000}, Stop: [2]float64{5000}, RippleDB: 1, RejectDB: 120, Rate: 48000},
		{Kind: Lowpass, Pass: [2]float64{4000}, Stop: [2]float64{15000}, RippleDB: 3, RejectDB: 10, Rate: 48000},
	}
}

// TestEquiripple: the kernel meets its mask and is no longer than Kaiser's; it
// is the shortest, since the best possible kernel of two taps fewer deviates
// more than allowed.
func TestEquiripple(t *testing.T) {
	for _, m := range shortMasks() {
		metAndShort(t, "equiripple", m, Equiripple, 1)
		taps, err := Equiripple(m)
		noError(t, err)
		s := BandSpec{Taps: len(taps) - 2, Rate: m.Rate, Bands: m.bands()}
		if s.Taps < 1 || m.Pass[0]-m.Stop[0] == 600 {
			continue // guarded: the free optimum swings out in the transition
		}
		d, err := exchange(s, RemezOptions{}, true)
		if err == nil && !(d.deviation() > 1) {
			t.Errorf("%v: %d taps deviate by %g of the allowed, so they meet it too", m.Kind, s.Taps, d.deviation())
		}
	}
}

// TestEquirippleUneven: with one transition six times as wide as the other the
// gain swings out in the wide one, and the mask is met all the same.
func TestEquirippleUneven(t *testing.T) {
	m := Mask{Kind: Bandpass, Pass: [2]float64{6000, 8000}, Stop: [2]float64{5500, 11000}, RippleDB: 0.1, RejectDB: 60, Rate: 48000}
	s := BandSpec{Taps: 201, Rate: m.Rate, Bands: m.bands()}
	_, _, err := ParksMcClellan(s, RemezOptions{})
	wantError(t, err, "between the bands")
	metAndShort(t, "uneven", m, Equiripple, 1)
}

func TestEquirippleMaskErrors(t *testing.T) {
	m := shortMasks()[0]
	m.Stop[0] = m.Pass[0] + 1
	_, err := Equiripple(m)
	wantError(t, err, "equiripple lowpass", "more than 4095", "widen the transition", "family kaiser")
	_, err = LeastSquaresFor(m)
	wantError(t, err, "least squares lowpass", "more than 2047", "widen the transition", "family kaiser")
	m = shortMasks()[0]
	m.RejectDB = 300
	_, err = Equiripple(m)
	wantError(t, err, "equiripple lowpass", "family kaiser")
	m.RippleDB = -1
	_, err = Equiripple(m)
	wantError(t, err, "ripple of -1 dB")
	_, err = LeastSquaresFor(m)
	wantError(t, err, "ripple of -1 dB")
}

// drawnMask draws a valid mask of transitions between 0.6 and 8 % of the rate.
func drawnMask(t *rapid.T) Mask {
	kind := Kind(rapid.IntRange(int(Lowpass), int(Bandstop)).Draw(t, "kind"))
	rate := rapid.SampledFrom([]float64{8000, 44100, 48000, 192000}).Draw(t, "rate")
	part := func(name string, lo, hi float64) float64 { return rate * rapid.Float64Range(lo, hi).Draw(t, name) }
	at := part("first", 0.05, 0.25)
	m := MaskAround(kind, rate, part("width", 0.02, 0.08), rapid.Float64Range(0.01, 1).Draw(t, "ripple"), rapid.Float64Range(20, 90).Draw(t, "reject"),
		[]float64{at, at + part("apart", 0.09, 0.2)}[:kind.Edges()]...)
	if kind.Edges() == 2 {
		m.Stop[1] = m.Pass[1] + (m.Stop[1]-m.Pass[1])*rapid.Float64Range(0.3, 1).Draw(t, "uneven")
	}
	return m
}

// TestAnyMaskMet: for any mask a kernel meets it as measured, or the error
// says that it is not met and what to do.
func TestAnyMaskMet(t *testing.T) {
	for name, build := range map[string]func(Mask) ([]float64, error){"equiripple": Equiripple, "least squares": LeastSquaresFor} {
		refused := 0
		rapid.Check(t, func(t *rapid.T) {
			m := rapid.Custom(drawnMask).Filter(func(m Mask) bool { return m.Validate() == nil }).Draw(t, "mask")
			taps, err := build(m)
			if err != nil {
				refused++
				for _, part := range []string{name, "family kaiser"} {
					if !strings.Contains(err.Error(), part) {
						t.Fatalf("%+v: %v does not say %q", m, err, part)
					}
				}
			} else if got := MeasureTaps(taps, m); !got.Meets(m) {
				t.Fatalf("%+v: %d taps measure %+v", m, len(taps), got)
			}
		})
		t.Logf("%s: %d masks refused", name, refused)
	}
}

// BenchmarkLeastSquaresFor takes a mask of some two hundred taps.
func BenchmarkLeastSquaresFor(b *testing.B) {
	m := shortMasks()[0]
	for b.Loop() {
		taps, err := LeastSquaresFor(m)
		if err != nil {
			b.Fatal(err)
		}
		b.ReportMetric(float64(len(taps)), "taps")
	}
}

// BenchmarkEquirippleFor takes the same mask.
func BenchmarkEquirippleFor(b *testing.B) {
	m := shortMasks()[0]
	for b.Loop() {
		taps, err := Equiripple(m)
		if err != nil {
			b.Fatal(err)
		}
		b.ReportMetric(float64(len(taps)), "taps")
	}
}

// TestLeastSquaresFor: the mask is met; with its deviation gathered at the
// edges it may take a little more than Kaiser's kernel.
func TestLeastSquaresFor(t *testing.T) {
	for _, m := range shortMasks() {
		metAndShort(t, "least squares", m, LeastSquaresFor, 1.15)
	}
}
