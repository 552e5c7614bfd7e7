package design

import (
	"math"
	"math/cmplx"
	"testing"

	"fettle/filter/response"
)

func section(t *testing.T) func(response.Section, error) response.Section {
	return func(s response.Section, err error) response.Section {
		t.Helper()
		noError(t, err)
		return s
	}
}

// TestCookbookTable compares with the tabled sections at 48 kHz, 1 kHz
// (testdata/README.md; twelve decimals, gain and delay six). The table's
// low-pass and high-pass are Butterworth of second order.
func TestCookbookTable(t *testing.T) {
	const rate, f0 = 48000, 1000
	must := section(t)
	second := func(kind Kind) response.Section {
		f, err := Butterworth(kind, 2, rate, f0)
		return must(f.Sections()[0], err)
	}
	made := map[string]response.Section{
		"lpf":   second(Lowpass),
		"hpf":   second(Highpass),
		"bpf":   must(BandPass(rate, f0, 1)),
		"notch": must(Notch(rate, f0, 30)),
		"apf":   must(AllPass(rate, f0, 0.7071067812)),
		"peak":  must(Bell(rate, f0, 6, 1)),
		"ls":    must(LowShelfSlope(rate, f0, 6, 1)),
		"hs":    must(HighShelfSlope(rate, f0, 6, 1)),
	}
	compared := 0
	for _, row := range readCSV(t, "rbj-48k-1k.csv") {
		s, known := made[row[0]]
		if !known {
			continue // the head of the table
		}
		compared++
		for i, got := range []float64{s.B0, s.B1, s.B2, s.A1, s.A2} {
			near(t, row[0], got, number(t, row[2+i]), 1e-10) // the table's Q has ten decimals
		}
		if row[0] == "notch" {
			continue // no gain or delay at its zero
		}
		one := []response.Section{s}
		near(t, row[0]+" gain", decibelsAt(one, f0, rate), number(t, row[7]), 1e-6)
		near(t, row[0]+" delay", response.SectionsGroupDelay(one, radians(f0, rate)), number(t, row[8]), 2e-6)
	}
	if compared != len(made) {
		t.Errorf("%d rows compared, want %d", compared, len(made))
	}
}

// TestShapesAtManyRates: gains at 0 Hz, f0 and half the rate, which are the
// analogue prototype's at 0, 1 and infinity whatever the rate. 20 Hz at 384 kHz
// leaves 1e-9 in the coefficients.
func TestShapesAtManyRates(t *testing.T) {
	must := section(t)
	for _, rate := range []float64{8000, 44100, 96000, 192000, 384000} {
		for _, f0 := range []float64{20, 1000, 0.4 * rate} {
			for _, gain := range []float64{-18, -6, 3, 12} {
				checkShape(t, must(Bell(rate, f0, gain, 1.1)), rate, f0, 0, gain, 0)
				checkShape(t, must(LowShelf(rate, f0, gain, math.Sqrt2/2)), rate, f0, gain, gain/2, 0)
				checkShape(t, must(LowShelfSlope(rate, f0, gain, 0.7)), rate, f0, gain, gain/2, 0)
				checkShape(t, must(HighShelf(rate, f0, gain, 0.6)), rate, f0, 0, gain/2, gain)
				checkShape(t, must(HighShelfSlope(rate, f0, gain, 1)), rate, f0, 0, gain/2, gain)
			}
		}
	}
}

func checkShape(t *testing.T, s response.Section, rate, f0, dc, at, half float64) {
	t.Helper()
	one := []response.Section{s}
	near(t, "0 Hz", decibelsAt(one, 0, rate), dc, 1e-6)
	near(t, "f0", decibelsAt(one, f0, rate), at, 1e-6)
	near(t, "half the rate", toDB(cmplx.Abs(response.SectionsAt(one, math.Pi))), half, 1e-9)
}

// TestInverses: +g then -g is the identity, coefficient by coefficient.
func TestInverses(t *testing.T) {
	must := section(t)
	up, down := must(Bell(48000, 3200, 2.5, 1.1)), must(Bell(48000, 3200, -2.5, 1.1))
	near(t, "b1/b0", up.B1/up.B0, down.A1, 1e-15)
	near(t, "b2/b0", up.B2/up.B0, down.A2, 1e-15)
	near(t, "b0", up.B0*down.B0, 1, 1e-15)
}

// TestNotch: -3.0103 dB exactly width apart, at any centre and rate; at the
// centre nothing is left but rounding.
func TestNotch(t *testing.T) {
	must := section(t)
	for _, c := range []struct{ rate, f0, width float64 }{
		{48000, 50, 2}, {48000, 1000, 300}, {8000, 3600, 500}, {192000, 60, 1}, {44100, 15000, 9000},
	} {
		s := []response.Section{must(NotchWidth(c.rate, c.f0, c.width))}
		below := crossing(s, c.rate, math.Max(0, c.f0-2*c.width), c.f0)
		above := crossing(s, c.rate, math.Min(c.rate/2, c.f0+2*c.width), c.f0)
		near(t, "width", (above-below)/c.width, 1, 1e-7)
		near(t, "centre", cmplx.Abs(response.SectionsAt(s, radians(c.f0, c.rate))), 0, 1e-8)
	}
	q := must(Notch(48000, 50, 25))
	width := must(NotchWidth(48000, 50, 2))
	near(t, "q = f0/width at low f0", q.A2, width.A2, 1e-8)
}

// crossing halves the interval between a passed and a stopped frequency down
// to the half-power point.
func crossing(s []response.Section, rate, passed, stopped float64) float64 {
	for range 60 {
		middle := (passed + stopped) / 2
		if cmplx.Abs(response.SectionsAt(s, radians(middle, rate))) > math.Sqrt2/2 {
			passed = middle
		} else {
			stopped = middle
		}
	}
	return passed
}

// TestAllPasses: magnitude 1, phase at f0, group delay in closed form
// (cookbook: 4 Q/sin w0 at f0, 1/(Q tan(w0/2)) at 0 Hz), and n pi as integral.
func TestAllPasses(t *testing.T) {
	const rate, f0, q = 48000, 1000, 0.7
	must := section(t)
	second := []response.Section{must(AllPass(rate, f0, q))}
	first := []response.Section{must(AllPassFirst(rate, f0))}
	w0 := radians(f0, rate)
	near(t, "second, f0", response.SectionsGroupDelay(second, w0), 4*q/math.Sin(w0), 1e-10)
	near(t, "second, 0 Hz", response.SectionsGroupDelay(second, 0), 1/(q*math.Tan(w0/2)), 1e-10)
	near(t, "second, phase", cmplx.Abs(response.SectionsAt(second, w0)+1), 0, 1e-12)
	near(t, "first, phase", cmplx.Abs(response.SectionsAt(first, w0)+1i), 0, 1e-12)
	c := first[0].A1
	near(t, "first, 0 Hz", response.SectionsGroupDelay(first, 0), (1-c)/(1+c), 1e-10)
	checkAllPass(t, second, 2)
	checkAllPass(t, first, 1)
}

// checkAllPass integrates by the trapezoid rule, which errs as the pole radius
// to the power of the number of points.
func checkAllPass(t *testing.T, s []response.Section, order float64) {
	t.Helper()
	const n = 4096
	sum := (response.SectionsGroupDelay(s, 0) + response.SectionsGroupDelay(s, math.Pi)) / 2
	for i := 1; i < n; i++ {
		omega := math.Pi * float64(i) / n
		sum += response.SectionsGroupDelay(s, omega)
		near(t, "magnitude", cmplx.Abs(response.SectionsAt(s, omega)), 1, 1e-12)
	}
	near(t, "integral/pi", sum/n, order, 1e-10)
}

// TestDC: the blocker is the first-order Butterworth high-pass.
func TestDC(t *testing.T) {
	for _, rate := range []float64{8000, 48000, 384000} {
		s := section(t)(DC(rate, 2))
		f, err := Butterworth(Highpass, 1, rate, 2)
		noError(t, err)
		want := f.Sections()[0]
		near(t, "b0", s.B0, want.B0, 1e-15)
		near(t, "b1", s.B1, want.B1, 1e-15)
		near(t, "a1", s.A1, want.A1, 1e-15)
		near(t, "gain", s.B0, (1-s.A1)/2, 1e-15)
		if h := response.SectionsAt([]response.Section{s}, 0); h != 0 {
			t.Errorf("0 Hz passes with %g", h)
		}
	}
}

// TestBandwidthQ: one octave at 1 kHz, 48 kHz is Q 1.41002 (recomputed from the
// cookbook's formula with NumPy), the analogue limit sqrt(2); and a bell of
// that Q is at half its gain on points one octave apart.
func TestBandwidthQ(t *testing.T) {
	near(t, "one octave", BandwidthQ(48000, 1000, 1), 1.41002, 5e-6)
	near(t, "analogue limit", BandwidthQ(48000, 1, 1), math.Sqrt2, 1e-6)
	s := []response.Section{section(t)(Bell(48000, 1000, 6, BandwidthQ(48000, 1000, 1)))}
	// The formula is exact only in the limit of low f0: 1e-3 dB at w0 = 0.13.
	near(t, "half gain below", decibelsAt(s, 1000/math.Sqrt2, 48000), 3, 5e-3)
	near(t, "half gain above", decibelsAt(s, 1000*math.Sqrt2, 48000), 3, 2e-2)
}

func TestCookbookErrors(t *testing.T) {
	check := func(says string) func(response.Section, error) {
		return func(_ response.Section, err error) { t.Helper(); wantError(t, err, says) }
	}
	check("bell: 24000 Hz is not below half the sample rate (24000 Hz);")(Bell(48000, 24000, 3, 1))
	check("bell: a q of 0")(Bell(48000, 1000, 3, 0))
	check("bell: a gain of NaN dB")(Bell(48000, 1000, math.NaN(), 1))
	check("low shelf: a slope of -1")(LowShelfSlope(48000, 1000, 3, -1))
	check("too steep for 12 dB")(HighShelfSlope(48000, 1000, 12, 50))
	check("high shelf: a gain of +Inf dB")(HighShelf(48000, 1000, math.Inf(1), 1))
	check("notch: a q of NaN")(Notch(48000, 50, math.NaN()))
	check("notch: a width in Hz of 0")(NotchWidth(48000, 50, 0))
	check("notch: 30000 Hz is not below half")(NotchWidth(48000, 50, 30000))
	check("allpass: -1 Hz is not above 0 Hz")(AllPass(48000, -1, 1))
	check("allpass: 0 Hz is not above 0 Hz")(AllPassFirst(48000, 0))
	check("dc: 24000 Hz is not below half")(DC(48000, 24000))
}
