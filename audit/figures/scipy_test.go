package figures

import (
	"encoding/json"
	"math"
	"os"
	"testing"
)

// reference is what scipy.signal.group_delay says (testdata/group_delay.py).
type reference struct {
	Radians []float64
	Filters []struct {
		Sections [][6]float64 // b0, b1, b2, 1, a1, a2
		Figures  [][2]float64 // dB re 1, samples
	}
}

// Group delay against scipy.signal.group_delay on 100 random stable filters, half of them
// with zeros on the unit circle at the very frequencies asked for. What is 60 dB
// under the maximum is not stated, all the rest is, and no value is a spike.
func TestGroupDelayAgainstSciPy(t *testing.T) {
	var ref reference
	text, err := os.ReadFile("testdata/group_delay.json")
	if err != nil {
		t.Fatal(err)
	}
	if err := json.Unmarshal(text, &ref); err != nil {
		t.Fatal(err)
	}
	stated, singular, worst := 0, 0, 0.0
	for _, f := range ref.Filters {
		// 0.97^3000 is 2e-40.
		s := newSpectrum(impulseOf(f.Sections, 3000), 0, rate16, 1)
		curve := s.curve(0, 0)
		floor := 10*math.Log10(s.peak) - 60
		for i, want := range f.Figures {
			got := curve.GroupDelay[6*i] * rate16
			within(t, "frequency", 2*math.Pi*curve.Hz[6*i]/rate16, ref.Radians[i], 1e-12)
			switch {
			case want[0] < floor:
				singular++
				if !math.IsNaN(got) {
					t.Errorf("%.1f dB under the maximum the group delay is %g samples, want it not stated", floor+60-want[0], got)
				}
			default:
				stated++
				off := math.Abs(got - want[1])
				worst = max(worst, off)
				// SciPy has the sections multiplied out: eight close roots lose half the digits.
				within(t, "group delay, samples", got, want[1], 1e-7*max(1, math.Abs(want[1])))
			}
		}
	}
	t.Logf("%d filters, %d values within %.2g samples, %d not stated", len(ref.Filters), stated, worst, singular)
	if len(ref.Filters) != 100 || stated < 3000 || singular < 50 {
		t.Errorf("%d filters, %d values stated, %d not; the table is not what it was", len(ref.Filters), stated, singular)
	}
}

// impulseOf is the impulse response of sections in cascade, in direct form.
func impulseOf(sections [][6]float64, length int) []float64 {
	x := delta(0, length)
	for _, s := range sections {
		var x1, x2, y1, y2 float64
		for n, v := range x {
			y := s[0]*v + s[1]*x1 + s[2]*x2 - s[4]*y1 - s[5]*y2
			x1, x2, y1, y2 = v, x1, y, y1
			x[n] = y
		}
	}
	return x
}
