package design

import (
	"math"
	"math/cmplx"
	"testing"

	"fettle/filter/response"
)

func windowOf(t *testing.T, name string, n int) []float64 {
	t.Helper()
	w, err := Window(name, n)
	noError(t, err)
	return w
}

// TestFrequencySampling compares taps with scipy.signal.firwin2 over all four
// types, steps included, on the reference's own number of points.
func TestFrequencySampling(t *testing.T) {
	worst := 0.0
	for _, c := range loadFIR(t).Sampled {
		s := Sampling{Taps: c.N, Antisymmetric: c.Antisymmetric, Rate: c.Rate, Hz: c.Hz, Gain: c.Gain, Points: c.Points}
		taps, err := FrequencySampling(s, windowOf(t, c.Window, c.N))
		noError(t, err)
		d := worstTap(t, taps, c.Taps)
		worst = math.Max(worst, d)
		if !(d <= 1e-13) { // two transforms of at most 256 points, gains of about 1
			t.Errorf("%d taps, antisymmetric %v, %s, %v %v: off by %.3g", c.N, c.Antisymmetric, c.Window, c.Hz, c.Gain, d)
		}
		if kind, want := response.Symmetry(taps, 0), LinearPhaseType(c.N, c.Antisymmetric); kind != want {
			t.Errorf("symmetry %v, want %v", kind, want)
		}
	}
	t.Logf("taps within %.2g", worst)
}

// TestSampledCurve: away from its corners the curve is followed; a Hann window
// of 401 taps leaves less than 1e-4 of a slope's change four main lobes off.
func TestSampledCurve(t *testing.T) {
	s := Sampling{Taps: 401, Rate: 48000, Hz: []float64{0, 2000, 12000, 24000}, Gain: []float64{1, 1, 0.25, 0.25}}
	taps, err := FrequencySampling(s, windowOf(t, "hann", 401))
	noError(t, err)
	for hz := 0.0; hz <= 24000; hz += 100 {
		if math.Abs(hz-2000) < 2000 || math.Abs(hz-12000) < 2000 {
			continue
		}
		near(t, "gain", cmplx.Abs(response.TapsAt(taps, radians(hz, s.Rate))), s.gainAt(hz), 1e-4)
	}
	bare, err := FrequencySampling(s, nil)
	noError(t, err)
	square, err := FrequencySampling(s, windowOf(t, "rectangular", 401))
	noError(t, err)
	if d := worstTap(t, bare, square); d != 0 {
		t.Errorf("no window and the rectangular one differ by %g", d)
	}
}

func TestSamplingErrors(t *testing.T) {
	good := Sampling{Taps: 33, Rate: 8000, Hz: []float64{0, 1000, 4000}, Gain: []float64{1, 0.5, 0}}
	for _, c := range []struct {
		change func(s *Sampling)
		says   string
	}{
		{func(s *Sampling) { s.Taps = 0 }, "taps must lie between 1"},
		{func(s *Sampling) { s.Rate = math.NaN() }, "rate of NaN Hz"},
		{func(s *Sampling) { s.Gain = s.Gain[:2] }, "3 frequencies and 2 gains"},
		{func(s *Sampling) { s.Hz, s.Gain = nil, nil }, "at least two corners"},
		{func(s *Sampling) { s.Hz[2] = 3000 }, "from 0 to 3000 Hz; it must begin at 0 Hz and end at half the sample rate (4000 Hz)"},
		{func(s *Sampling) { s.Hz[1] = 5000 }, "4000 Hz follows 5000 Hz"},
		{func(s *Sampling) { s.Hz[1] = math.NaN() }, "NaN Hz follows 0 Hz"},
		{func(s *Sampling) { s.Hz, s.Gain = []float64{0, 9, 9, 9, 4000}, make([]float64, 5) }, "9 Hz is given three times"},
		{func(s *Sampling) { s.Gain[1] = math.Inf(1) }, "gain at 1000 Hz is +Inf"},
		{func(s *Sampling) { s.Points = 100 }, "100 points is not a power of two"},
		{func(s *Sampling) { s.Points = 16 }, "16 points is not a power of two of at least half the taps"},
		{func(s *Sampling) { s.Taps, s.Gain[2] = 32, 1 }, "even length has a forced zero at half the sample rate (type II); use an odd length, 33 in place of 32"},
		{func(s *Sampling) { s.Antisymmetric = true }, "must pass 0 Hz"},
	} {
		s := good
		s.Hz, s.Gain = append([]float64(nil), good.Hz...), append([]float64(nil), good.Gain...)
		c.change(&s)
		_, err := FrequencySampling(s, nil)
		wantError(t, err, "frequency sampling", c.says)
	}
	_, err := FrequencySampling(good, make([]float64, 32))
	wantError(t, err, "window of 32 points")
}
