package pair

import (
	"math"
	"math/rand/v2"
	"testing"

	"fettle/audit/figures"
	"fettle/filter/design"
	"fettle/filter/response"
)

// TestNarrowNotches: notches that ring for longer than responses are looked at, with
// hardly any noise. What is stated of bands holds the truth in nine of ten, however
// long the recording is; the notch's own band is not stated or says how little is known.
func TestNarrowNotches(t *testing.T) {
	t.Parallel()
	sections := []response.Section{highpass(45, rate)}
	for _, hz := range []float64{50, 100, 150} {
		s, err := design.NotchWidth(rate, hz, 2)
		if err != nil {
			t.Fatal(err)
		}
		sections = append(sections, s)
	}
	want := figures.Measure(figures.Response{H: response.Impulse(sections, 4*rate), Rate: rate})
	for _, seconds := range []int{4, 10, 40} {
		x := pinkish(seconds*rate, uint64(seconds))
		_, c := filteredBy(t, x, through(x, sections, 0, 1, 1e-7, 1))
		held, all := 0, 0
		for i, b := range want.Bands {
			got := c.Bands[i]
			if math.IsNaN(got.Arrival) {
				if c.NotStated[bandKey(b.Band)] == "" {
					t.Errorf("%d s, %g Hz: no reason", seconds, b.Nominal)
				}
				continue
			}
			all++
			if math.Abs(got.Arrival+c.Delay/rate-b.Arrival-want.Latency/rate) <= math.Hypot(got.ArrivalErr, c.DelayErr/rate) {
				held++
			} else {
				t.Logf("%d s, %g Hz: %.3g ±%.2g ms, want %.3g", seconds, b.Nominal, 1e3*got.Arrival, 1e3*got.ArrivalErr, 1e3*b.Arrival)
			}
		}
		if all < 8 || 10*held < 9*all {
			t.Errorf("%d s: %d of %d bands hold the truth", seconds, held, all)
		}
	}
}

// pinkish is noise that falls by about 3 dB an octave.
func pinkish(n int, seed uint64) []float64 {
	random := rand.New(rand.NewPCG(seed, 9))
	var slow [8]float64
	x := make([]float64, n)
	for i := range x {
		v := random.NormFloat64()
		for k := range slow {
			a := math.Exp2(-float64(k)) // a corner an octave lower each
			slow[k] += a * (v - slow[k])
			x[i] += slow[k] / 8
		}
	}
	return x
}
