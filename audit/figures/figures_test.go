package figures

import (
	"math"
	"testing"

	"fettle/filter/response"

	"pgregory.net/rapid"
)

// nothingShows checks the figures of a response that only delays: whatever the delay.
func nothingShows(t *testing.T, f *Figures, latency float64) {
	t.Helper()
	within(t, "latency", f.Latency, latency, 0)
	none := RingColumn{Level: None, Beyond: [3]float64{None, None, None}}
	sameRing(t, f.PreRing, Ring{White: none, Pink: none}, 0)
	sameRing(t, f.PostRing, Ring{White: none, Pink: none}, 0)
	// 1e-8 degrees: rounding of a phase of 2π·0.45·5000, turned back.
	const phase = 1e-8
	within(t, "phase deviation", f.PhaseDeviation, 0, phase)
	for name, got := range map[string]float64{
		"pink smear": f.Pink.Total, "white smear": f.White.Total, "D90": f.D90, "D99.9": f.D999,
		"delay spread": f.DelaySpread,
	} {
		within(t, name, got, 0, 1e-12)
	}
	for _, b := range f.Bands {
		for name, got := range map[string]float64{"gain": b.Gain, "arrival": b.Arrival, "spread": b.Spread,
			"pre-ring": b.PreRing, "post-ring": b.PostRing} {
			within(t, name, got, 0, 1e-12)
		}
		within(t, "phase deviation", b.PhaseDeviation, 0, phase)
		if !b.Carried {
			t.Errorf("band %g Hz is not carried", b.Nominal)
		}
	}
}

func TestIdentityAndDelayShowNothing(t *testing.T) {
	for _, rate := range []float64{8000, 44100} {
		for _, at := range []int{0, 5000} {
			for _, origin := range []int{at, 0} {
				f := Measure(Response{H: delta(at, at+40), Origin: origin, Rate: rate})
				nothingShows(t, f, float64(at-origin))
				within(t, "lead", f.Lead, 0, 0)
				if f.Polarity != 1 || len(f.NotStated) != 0 {
					t.Errorf("polarity %d, not stated %v", f.Polarity, f.NotStated)
				}
			}
		}
	}
	nothingShows(t, Measure(Response{H: []float64{-1}, Rate: rate8}), 0)
	within(t, "lead", at8(delta(8, 20), 16).Lead, 1e-3, 1e-15)
}

// Time reversed, what was early is late; smear and D90 stay.
func TestTimeReversal(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		h := drawn(t)
		f := Measure(Response{H: h, Rate: small})
		g := Measure(Response{H: reversed(h), Rate: small})
		// 1e-6 dB: sums of energy in another order, at levels down to -200 dB.
		sameRing(t, f.PreRing, g.PostRing, 1e-6)
		sameRing(t, f.PostRing, g.PreRing, 1e-6)
		within(t, "white smear", g.White.Total, f.White.Total, 1e-9*f.White.Total)
		within(t, "D90", g.D90, f.D90, 0)
		within(t, "delay spread", g.DelaySpread, f.DelaySpread, 1e-9)
		for i, b := range f.Bands {
			if !math.IsNaN(b.PreRing) {
				within(t, "band ring", b.PreRing, g.Bands[i].PostRing, 2/small+2e-3*b.PreRing)
			}
		}
	})
}

// Gain and sign change levels only.
func TestGainInvariance(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		h := drawn(t)
		gain := rapid.SampledFrom([]float64{-1, 1e-6, -3.7, 1e5}).Draw(t, "gain")
		f := Measure(Response{H: h, Rate: small})
		g := Measure(Response{H: scaled(h, gain), Rate: small})
		sameRing(t, f.PreRing, g.PreRing, 1e-6)
		within(t, "latency", g.Latency, f.Latency, 1e-6)
		within(t, "pink smear", g.Pink.Total, f.Pink.Total, 1e-9*f.Pink.Total)
		within(t, "delay spread", g.DelaySpread, f.DelaySpread, 1e-8)
		within(t, "phase deviation", g.PhaseDeviation, f.PhaseDeviation, 1e-4)
		for i, b := range f.Bands {
			within(t, "gain", g.Bands[i].Gain-b.Gain, 20*math.Log10(math.Abs(gain)), 1e-6)
		}
	})
}

// drawn is a response of 2 to 200 samples without symmetry.
func drawn(t *rapid.T) []float64 {
	return decaying(rapid.Uint64().Draw(t, "seed"), rapid.IntRange(2, 200).Draw(t, "length"))
}

func TestUnusableResponses(t *testing.T) {
	for name, r := range map[string]Response{
		"empty":    {Rate: 48000},
		"silent":   {H: make([]float64, 100), Rate: 48000},
		"NaN":      {H: []float64{1, math.NaN()}, Rate: 48000},
		"infinite": {H: []float64{math.Inf(-1)}, Rate: 48000},
		"huge":     {H: []float64{1e200}, Rate: 48000},
		"tiny":     {H: []float64{1e-200}, Rate: 48000},
		"no rate":  {H: []float64{1}},
		"NaN rate": {H: []float64{1}, Rate: math.NaN()},
		"low rate": {H: []float64{1}, Rate: 44},
	} {
		f := Measure(r)
		if f.NotStated["response"] == "" {
			t.Errorf("%s: no reason given", name)
		}
		for _, v := range []float64{f.Latency, f.Lead, f.Pink.Total, f.SumTest, f.PreRing.Pink.Level} {
			if !math.IsNaN(v) {
				t.Errorf("%s: %g stated", name, v)
			}
		}
		if d, polarity := response.BulkLatency(r.H, 0, r.Rate); !math.IsNaN(d) || polarity != 0 {
			t.Errorf("%s: latency %g, polarity %d", name, d, polarity)
		}
	}
}

// A band that holds next to nothing is absent with its reason, and only there.
func TestEmptyBandsAreNotStated(t *testing.T) {
	f := at48(butterworth(8, 2000, 4000, rate48, 1<<12), 0) // 60 dB down at 1.3 and 6.1 kHz
	absent := 0
	for _, b := range f.Bands {
		if math.IsNaN(b.Arrival) {
			absent++
			if b.Carried || b.Centre > 1500 && b.Centre < 5500 {
				t.Errorf("band %g Hz is not stated", b.Nominal)
			}
		}
	}
	if reasons := len(f.NotStated); absent == 0 || reasons < absent {
		t.Errorf("%d bands not stated, reasons %v", absent, f.NotStated)
	}
}

func TestCarriedLengthPanics(t *testing.T) {
	defer func() {
		if recover() == nil {
			t.Error("three carried bands at 48 kHz did not panic")
		}
	}()
	Measure(Response{H: []float64{1}, Rate: 48000, Carried: make([]bool, 3)})
}

// The kernel of a high-pass at 70 Hz, 16385 taps.
func BenchmarkMeasure16kTaps(b *testing.B) {
	h := zeroPhase(butterworth(4, 70, openTop, rate48, 1<<14), 1<<13)
	for b.Loop() {
		at48(h, 1<<13)
	}
}

// A response that rings in every band: an impulse and ten seconds of decaying noise.
func BenchmarkMeasure500kTaps(b *testing.B) {
	h := decaying(1, 500000)
	h[0] = 30
	for b.Loop() {
		at48(h, 0)
	}
}
