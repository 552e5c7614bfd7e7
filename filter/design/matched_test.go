package design

import (
	"fmt"
	"math"
	"math/cmplx"
	"testing"

	"fettle/filter/response"
)

// boost is a bell or shelf in three forms.
type boost struct {
	name              string
	matched, cookbook func(rate, f0, gainDB, q float64) (response.Section, error)
	analogue          func(a, q float64) biquadratic
}

func boosts() []boost {
	return []boost{
		{"bell", MatchedBell, Bell, analogueBell},
		{"low shelf", MatchedLowShelf, LowShelf, analogueLowShelf},
		{"high shelf", MatchedHighShelf, HighShelf, analogueHighShelf},
	}
}

// deviationDB is the largest difference in dB between a section and the
// analogue prototype, on frequencies from 20 Hz up to hz.
func deviationDB(s response.Section, b biquadratic, rate, f0, hz float64) float64 {
	worst := 0.0
	for f := 20.0; f <= hz; f += 20 {
		worst = math.Max(worst, math.Abs(decibelsAt([]response.Section{s}, f, rate)-toDB(math.Sqrt(b.squared(f/f0)))))
	}
	return worst
}

// TestMatchedAgainstAnalogue: how far each form is from the analogue prototype
// (the s-domain functions of the Audio EQ Cookbook) up to 20 kHz, and how much
// nearer the matched one is. The allowed figures are what the method reached in
// a NumPy trial of it, rounded up; the ratio is the point of it.
func TestMatchedAgainstAnalogue(t *testing.T) {
	for _, c := range []struct {
		shape                     int
		rate, f0, gain, q         float64
		allowed, timesLessThanOld float64
	}{
		{0, 44100, 16000, 12, 1, 0.62, 12},
		{0, 44100, 16000, -12, 1, 0.62, 12},
		{0, 44100, 16000, 3, 4, 0.15, 10},
		{0, 44100, 5000, 6, 2, 0.12, 4},
		{0, 96000, 16000, 12, 1, 0.01, 30},
		{1, 44100, 12000, 6, math.Sqrt2 / 2, 0.18, 5},
		{1, 96000, 12000, 6, math.Sqrt2 / 2, 0.013, 10},
		{2, 44100, 12000, 6, math.Sqrt2 / 2, 0.18, 5},
		{2, 44100, 12000, -12, math.Sqrt2 / 2, 0.35, 6},
		{2, 44100, 18000, 6, math.Sqrt2 / 2, 0.39, 5},
		{2, 96000, 12000, 6, math.Sqrt2 / 2, 0.013, 10},
	} {
		shape := boosts()[c.shape]
		matched := section(t)(shape.matched(c.rate, c.f0, c.gain, c.q))
		cookbook := section(t)(shape.cookbook(c.rate, c.f0, c.gain, c.q))
		b := shape.analogue(fromDB(c.gain/2), c.q)
		got, old := deviationDB(matched, b, c.rate, c.f0, 20000), deviationDB(cookbook, b, c.rate, c.f0, 20000)
		name := fmt.Sprintf("%s %+g dB, q %.3g, %g Hz at %g Hz", shape.name, c.gain, c.q, c.f0, c.rate)
		t.Logf("%s: %.4f dB from analogue, the cookbook's %.4f dB", name, got, old)
		near(t, name, got, 0, c.allowed)
		if !(got*c.timesLessThanOld <= old) {
			t.Errorf("%s: %.4f dB is not %g times less than %.4f dB", name, got, c.timesLessThanOld, old)
		}
	}
}

// TestMatchedAtLowFrequencies: where nothing is compressed all three agree. The
// difference falls as the square of f0/rate.
func TestMatchedAtLowFrequencies(t *testing.T) {
	for _, shape := range boosts() {
		for _, gain := range []float64{-12, 6} {
			matched := section(t)(shape.matched(192000, 100, gain, 0.8))
			cookbook := section(t)(shape.cookbook(192000, 100, gain, 0.8))
			b := shape.analogue(fromDB(gain/2), 0.8)
			near(t, shape.name+" from analogue", deviationDB(matched, b, 192000, 100, 3000), 0, 1e-3)
			near(t, shape.name+" cookbook from analogue", deviationDB(cookbook, b, 192000, 100, 3000), 0, 1e-2)
		}
	}
}

// TestMatchedPrescribed: all over the plane of f0, q and gain the sections are
// stable and minimum phase, have the prototype's gain where the method says so,
// and +g cancels -g. At 4.8 Hz and 48 kHz the coefficients allow 1e-5 dB.
func TestMatchedPrescribed(t *testing.T) {
	const rate = 48000.0
	for _, shape := range boosts() {
		for _, part := range []float64{1e-4, 0.001, 0.01, 0.1, 0.25, 0.4, 0.45, 0.49, 0.499} {
			for _, q := range []float64{0.05, 0.2, 0.5, 0.7071, 2, 20} {
				for _, gain := range []float64{-40, -12, -0.1, 0.1, 3, 24} {
					name := fmt.Sprintf("%s %+g dB, q %g, %g Hz", shape.name, gain, q, part*rate)
					s := section(t)(shape.matched(rate, part*rate, gain, q))
					checkInside(t, name, s)
					checkInverse(t, name, s, section(t)(shape.matched(rate, part*rate, -gain, q)))
					checkPrescribed(t, name, s, shape.analogue(fromDB(gain/2), q), part, shape.name == "bell")
				}
			}
		}
		s := section(t)(shape.matched(rate, 15000, 0, 1))
		near(t, shape.name+" of 0 dB", deviationDB(s, biquadratic{[3]float64{0, 0, 1}, [3]float64{0, 0, 1}}, rate, 15000, 24000), 0, 1e-12)
	}
}

func checkInside(t *testing.T, name string, s response.Section) {
	t.Helper()
	for _, root := range append(s.Poles(), s.Zeros()...) {
		if !(cmplx.Abs(root) < 1) {
			t.Errorf("%s: a pole or zero at radius %.17g", name, cmplx.Abs(root))
		}
	}
}

func checkInverse(t *testing.T, name string, s, inverse response.Section) {
	t.Helper()
	near(t, name+" b0", s.B0*inverse.B0, 1, 1e-15)
	near(t, name+" b1", s.B1, s.B0*inverse.A1, 1e-15*math.Abs(s.B0)*2)
	near(t, name+" b2", s.B2, s.B0*inverse.A2, 1e-15*math.Abs(s.B0))
}

// checkPrescribed: a bell is right at 0 Hz and f0, a shelf at 0 Hz, at half the
// rate, and at the lower of f0 and a quarter of the rate.
func checkPrescribed(t *testing.T, name string, s response.Section, b biquadratic, part float64, bell bool) {
	t.Helper()
	parts := []float64{0, part}
	if !bell {
		parts = []float64{0, math.Min(part, 0.25), 0.5}
	}
	for _, p := range parts {
		got := toDB(cmplx.Abs(response.SectionsAt([]response.Section{s}, 2*math.Pi*p)))
		near(t, fmt.Sprintf("%s at %g of the rate", name, p), got, toDB(math.Sqrt(b.squared(p/part))), 1e-5)
	}
}

// TestMatchedPasses: low-, high- and band-pass against the analogue prototype
// up to 20 kHz at 44.1 kHz, beside the bilinear transform's error; allowed is
// what was reached, rounded up. Zeros at 0 Hz are exact.
func TestMatchedPasses(t *testing.T) {
	const rate, f0, q = 44100.0, 12000.0, math.Sqrt2 / 2
	den := [3]float64{1, 1 / q, 1}
	low, err := Butterworth(Lowpass, 2, rate, f0)
	noError(t, err)
	high, err := Butterworth(Highpass, 2, rate, f0)
	noError(t, err)
	c, err := newCorner(rate, f0, quantity{"q", q})
	noError(t, err)
	alpha := c.sin / (2 * q)
	band := normalised(alpha, 0, -alpha, 1+alpha, -2*c.cos, 1-alpha)
	for _, c := range []struct {
		name     string
		matched  func(rate, f0, q float64) (response.Section, error)
		num      [3]float64
		bilinear []response.Section
		from     float64
		allowed  float64
	}{
		{"lowpass", MatchedLowpass, [3]float64{0, 0, 1}, low.Sections(), 20, 0.95},
		{"highpass", MatchedHighpass, [3]float64{1, 0, 0}, high.Sections(), 2000, 0.2},
		{"bandpass", MatchedBandpass, [3]float64{0, 1 / q, 0}, []response.Section{band}, 500, 0.8},
	} {
		s := section(t)(c.matched(rate, f0, q))
		b := biquadratic{c.num, den}
		worst, old := 0.0, 0.0
		for f := c.from; f <= 20000; f += 20 {
			want := toDB(math.Sqrt(b.squared(f / f0)))
			worst = math.Max(worst, math.Abs(decibelsAt([]response.Section{s}, f, rate)-want))
			old = math.Max(old, math.Abs(decibelsAt(c.bilinear, f, rate)-want))
		}
		t.Logf("%s: %.3f dB from analogue, bilinear %.3f dB", c.name, worst, old)
		near(t, c.name, worst, 0, c.allowed)
		if !(10*worst <= old) {
			t.Errorf("%s: %.3f dB is not ten times less than %.3f dB", c.name, worst, old)
		}
		if atZero := response.SectionsAt([]response.Section{s}, 0); c.num[2] == 0 && !(cmplx.Abs(atZero) <= 1e-15) {
			t.Errorf("%s: 0 Hz passes with %g", c.name, atZero)
		}
	}
}

// TestShelfQ: slope 1 is q = 1/sqrt(2) at any gain, and by either figure the
// cookbook's shelf is the same.
func TestShelfQ(t *testing.T) {
	for _, gain := range []float64{-20, -3, 6, 12} {
		q, err := ShelfQ(gain, 1)
		noError(t, err)
		near(t, "slope 1", q, math.Sqrt2/2, 1e-15)
		q, err = ShelfQ(gain, 0.6)
		noError(t, err)
		a, b := section(t)(LowShelf(48000, 500, gain, q)), section(t)(LowShelfSlope(48000, 500, gain, 0.6))
		near(t, "by slope", a.B0, b.B0, 1e-15)
	}
	_, err := ShelfQ(6, 0)
	wantError(t, err, "a slope of 0 is not above 0")
	_, err = ShelfQ(12, 50)
	wantError(t, err, "a slope of 50 is too steep for 12 dB")
	_, err = ShelfQ(math.NaN(), 1)
	wantError(t, err, "a gain of NaN dB")
}

func TestMatchedErrors(t *testing.T) {
	check := func(says string) func(response.Section, error) {
		return func(_ response.Section, err error) { t.Helper(); wantError(t, err, says) }
	}
	check("matched bell: 24000 Hz is not below half the sample rate")(MatchedBell(48000, 24000, 3, 1))
	check("matched bell: a gain of +Inf dB")(MatchedBell(48000, 1000, math.Inf(1), 1))
	check("matched low shelf: a q of 0 is not above 0")(MatchedLowShelf(48000, 1000, 3, 0))
	check("matched high shelf: a q of NaN")(MatchedHighShelf(48000, 1000, 3, math.NaN()))
	check("matched lowpass: a q of -1")(MatchedLowpass(48000, 1000, -1))
	check("poles too near the unit circle; lower the gain or q")(MatchedBell(48000, 4.8, 100, 5))
}
