package onsets

import (
	"math"
	"math/rand/v2"
	"testing"
)

// slowEnvelope is the definition.
func slowEnvelope(x []float64, from int64, rate, t float64) float64 {
	var sum float64
	for i, v := range x {
		if off := t - float64(from+int64(i))/rate; math.Abs(off) < smoothing/2 {
			sum += v * v * (1 + math.Cos(2*math.Pi*off/smoothing))
		}
	}
	return sum / (smoothing * rate)
}

func TestEnvelopeIsItsDefinition(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 1))
	var e envelope
	for _, rate := range []float64{8000, 44100, 192000} {
		from := int64(5e9) // some hours into a recording
		x := noise(make([]float64, int(0.1*rate)), 0.3, 1)
		e.read(x, from, rate)
		for range 200 {
			at := (float64(from) + (r.Float64()*1.2-0.1)*float64(len(x))) / rate
			// The rounding of a time of hours, times the envelope's slope.
			within(t, "e(t)", e.at(at), slowEnvelope(x, from, rate, at), 1e-7)
		}
	}
}

// The kernel of a click peaks at the click, with 2/(W·fs), wherever the
// grid stands.
func TestPeakOfEnvelope(t *testing.T) {
	const rate = 48000
	x := silence(rate, 0.1)
	x[2400] = 1
	var e envelope
	e.read(x, 0, rate)
	for i := range 20 {
		from := 0.045 + float64(i)*step/20
		within(t, "peak", e.most(from, from+0.02)*smoothing*rate, 2, 1e-6)
	}
	if got := e.most(0.02, 0.01); got != 0 {
		t.Errorf("nothing between the times: %g", got)
	}
}

func TestCrossings(t *testing.T) {
	const rate = 48000
	x := silence(rate, 0.1)
	x[2400] = 1
	var e envelope
	e.read(x, 0, rate)
	half := 1 / (smoothing * rate) // half the peak, half of half the window off
	within(t, "climbs", e.climbs(half, 0.04, 0.06), 0.05-smoothing/4, 1e-9)
	within(t, "left", e.left(half, 0.04, 0.05), 0.05-smoothing/4, 1e-9)
	for name, got := range map[string]float64{
		"climbs from above": e.climbs(half, 0.05, 0.06),
		"climbs too high":   e.climbs(3*half, 0.04, 0.06),
		"left of nothing":   e.left(half, 0.0499, 0.0501),
		"left of a NaN":     e.left(half, 0.04, math.NaN()),
	} {
		if !math.IsNaN(got) {
			t.Errorf("%s: %g", name, got)
		}
	}
}

// The high-pass has -3 dB at 100 Hz, no offset, and ends in zeros.
func TestHighpassOfSignal(t *testing.T) {
	const rate = 48000
	for hz, want := range map[float64]float64{100: -3.01, 1000: -0.04, 11: -19.2} {
		x := silence(rate, 2)
		tone(x, rate, hz, 0, func(float64) float64 { return 1 })
		s := newSignal(rate)
		s.append(x, 0, 1)
		got := s.energy(1, 2)
		within(t, "dB", 10*math.Log10(2*got), want, 0.05)
	}
	s := newSignal(rate)
	x := silence(rate, 2)
	shift(x, 0.3)
	s.append(x, 0, 1)
	within(t, "offset", s.energy(0, 2), 0, 0)
	s.append(noise(silence(rate, 0.1), 0.1, 1), 0, 1)
	s.append(silence(rate, 1), 0, 1)
	within(t, "silence", s.x[len(s.x)-1], 0, 0)
}
