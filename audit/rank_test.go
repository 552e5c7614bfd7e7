package audit

import (
	"testing"

	"fettle/audit/figures"
	"fettle/filter"
)

// An engineer would rank linear-phase chains so by what they send ahead of a transient by
// more than 5 ms: a hum comb above a rumble filter above a telephone band-pass, and a
// bell or a steep low-pass at 12 kHz not at all. Levels by an independent trial of the
// definitions at 48 kHz, to 2 %; its comb has notches with a cusp, whose smooth twins here
// hold 1.011/0.858 times the energy, 0.7 dB.
func TestRankAsAnExpertWould(t *testing.T) {
	last := 0.0
	for _, c := range []struct {
		chain       string
		white, pink float64 // dB beyond 5 ms; pink 0: the trial does not say
	}{
		{"stages: [{hum: {mains: 50 Hz, harmonics: 8, width: 2 Hz}}]", -38.8 + 0.71, 0},
		{rumble, -42.1, -26.8},
		{"stages: [{bandpass: {at: [300 Hz, 3400 Hz], order: 4}}]", -53.8, 0},
	} {
		early := audited(t, c.chain, 48000, filter.Linear).Figures.PreRing
		within(t, c.chain+" white dB", early.White.Beyond[1], c.white, 0.02)
		if c.pink != 0 {
			within(t, c.chain+" pink dB", early.Pink.Beyond[1], c.pink, 0.02)
		}
		if !(early.White.Beyond[1] < last) {
			t.Errorf("%s: %.1f dB, not under the one before", c.chain, early.White.Beyond[1])
		}
		last = early.White.Beyond[1]
	}
	for _, chain := range []string{
		"stages: [{bell: {at: 3.2 kHz, gain: -2.5 dB, q: 1.1}}]",
		"stages: [{lowpass: {pass: 12 kHz, stop: 14 kHz, ripple: 0.1 dB, reject: 80 dB, family: equiripple}}]",
	} {
		early := audited(t, chain, 48000, filter.Linear).Figures.PreRing
		for _, column := range []figures.RingColumn{early.White, early.Pink} {
			if column.Beyond[1] != figures.None {
				t.Errorf("%s: %.1f dB beyond 5 ms, want none", chain, column.Beyond[1])
			}
		}
	}
}
