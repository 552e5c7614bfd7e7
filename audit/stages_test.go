package audit

import (
	"math"
	"testing"

	"fettle/filter"
	"fettle/filter/stream/machine"
)

// Which stage costs how much: a first-order all-pass has the variance 2c²/(1-c²), all of it phase
// (its group delay is a Poisson kernel), a gain costs nothing, and a delay delays all alike by what
// it says, a fraction of a sample too.
func TestStagesCostWhatTheyDo(t *testing.T) {
	const rate, samples = 48000, 10.37
	text := "stages: [{allpass: {at: 1 kHz}}, {gain: {by: -3 dB}}, {delay: {by: 10.37 samples}}, {lowpass: {at: 18 kHz, order: 2, when: rate >= 96 kHz}}]"
	c, err := filter.Parse([]byte(text), "chain.yaml")
	if err != nil {
		t.Fatal(err)
	}
	stages, err := Stages(c, rate, filter.Written, machine.Best())
	if err != nil {
		t.Fatal(err)
	}
	if len(stages) != 3 {
		t.Fatalf("%d stages, want 3: the rate leaves one out", len(stages))
	}
	tan := math.Tan(math.Pi * 1000 / rate)
	pole := (tan - 1) / (tan + 1)
	white := stages[0].Figures.White
	within(t, "all-pass, white smear s", white.Total, math.Sqrt(2*pole*pole/(1-pole*pole))/rate, 1e-6)
	within(t, "its phase share", white.Phase, white.Total, 1e-9)
	if gain := stages[1].Figures; gain.White.Total != 0 || gain.DelaySpread != 0 {
		t.Errorf("a gain smears by %g s and spreads delay by %g s", gain.White.Total, gain.DelaySpread)
	}
	late := stages[2].Figures
	for _, b := range late.Bands {
		if !(math.Abs(b.Arrival) <= 1e-7) || !(b.Spread <= 1e-7) {
			t.Errorf("delay: the %g Hz band is off by %g s, spread by %g s; allowed 1e-7", b.Nominal, b.Arrival, b.Spread)
		}
	}
	for i, hz := range late.Curve.Hz {
		if off := late.Curve.GroupDelay[i] - samples/rate; hz < 0.45*rate && !(math.Abs(off) <= 1e-7) {
			t.Errorf("delay: at %g Hz the group delay is off by %g s, allowed 1e-7", hz, off)
		}
	}
}
