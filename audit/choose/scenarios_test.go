package choose

import (
	"math"
	"slices"
	"testing"

	"fettle/filter"

	"github.com/google/go-cmp/cmp"
)

// scenarios are invented jobs with the realisation that the rules must
// recommend. misses says why the others are not: the limits that each fails.
var scenarios = []struct {
	name, chain string
	rate        int
	purpose     Purpose
	limits      []string
	take        string
	misses      map[string][]string
	later       []string // keep all limits too
}{
	{
		name:    "speech stem mixed with an untreated room microphone",
		chain:   "stages:\n  - highpass: {at: 80 Hz, order: 4}\n  - bell: {at: 3 kHz, gain: 2 dB, q: 0.9}\n",
		rate:    16000,
		purpose: Mix,
		take:    "linear",
		misses: map[string][]string{
			"iir": {"sum-test -0.5 dB"}, "minimum": {"sum-test -0.5 dB"}, "mixed": {"sum-test -0.5 dB"},
			"zero": {"target-error 0.5 dB"}, // half the order each way
		},
	},
	{
		name: "solo music master: the low cut may not ring ahead of the attacks",
		chain: `stages:
  - highpass: {at: 40 Hz, order: 4}
  - highshelf: {at: 8 kHz, gain: -2 dB}
  - lowpass: {pass: 18 kHz, stop: 21 kHz, reject: 80 dB, family: kaiser}
`,
		rate:    44100,
		purpose: Master,
		take:    "mixed",
		misses:  map[string][]string{"linear": {"pre-ring -60 dB beyond 5 ms"}, "zero": {"target-error 0.5 dB", "pre-ring -60 dB beyond 5 ms"}},
		later:   []string{"minimum", "iir"},
	},
	{
		name:    "speech corpus for alignment",
		chain:   "phase: minimum\nstages:\n  - highpass: {at: 70 Hz, order: 4}\n",
		rate:    16000,
		purpose: Alignment,
		take:    "linear",
		misses:  map[string][]string{"written": {"delay-spread 1 ms"}, "iir": {"delay-spread 1 ms"}, "mixed": {"delay-spread 1 ms"}, "zero": {"target-error 0.5 dB"}},
	},
	{
		name:    "live monitoring that may wait for 2 ms",
		chain:   "phase: linear\nstages:\n  - highpass: {at: 80 Hz, order: 2}\n  - bell: {at: 3 kHz, gain: 3 dB, q: 1}\n",
		rate:    16000,
		purpose: Live,
		limits:  []string{"latency=2 ms"}, // in place of the rule's 5 ms
		take:    "iir",
		misses:  map[string][]string{"linear": {"latency 2 ms"}, "written": {"latency 2 ms"}, "zero": {"target-error 0.5 dB", "latency 2 ms"}},
		later:   []string{"mixed"}, // its symmetric kernel, of the bell only, is short
	},
	{
		name:    "hum taken out for listeners",
		chain:   "phase: linear\nstages:\n  - hum: {mains: 50 Hz, harmonics: 4, width: 6 Hz}\n",
		rate:    8000,
		purpose: Listening,
		take:    "iir",
		misses:  map[string][]string{"linear": {"pre-ring -60 dB beyond 20 ms"}, "zero": {"pre-ring -60 dB beyond 20 ms"}},
	},
}

func TestScenarios(t *testing.T) {
	for _, s := range scenarios {
		t.Run(s.name, func(t *testing.T) {
			c := compared(t, Request{Chains: []Chain{chainOf(t, s.chain)}, Rate: s.rate, Purpose: s.purpose, Limits: limitsOf(t, s.limits...)})
			a := c.Asked()
			if a == nil || a.Chosen == nil || !slices.Contains(a.Chosen.Row.Names(), s.take) {
				t.Fatalf("advice %+v, want %s", a, s.take)
			}
			for name, want := range s.misses {
				if diff := cmp.Diff(want, missedNames(judgementOf(t, a, name))); diff != "" {
					t.Errorf("%s misses other limits: %s", name, diff)
				}
			}
			for _, name := range s.later {
				if j := judgementOf(t, a, name); !j.Keeps || j.Row == a.Chosen.Row {
					t.Errorf("%s keeps all limits: %v; chosen: %v", name, j.Keeps, j.Row == a.Chosen.Row)
				}
			}
		})
	}
}

// TestHumSharesARow: the notches as minimum phase are the recursive ones, cut off.
func TestHumSharesARow(t *testing.T) {
	hum := scenarios[4]
	c := compared(t, Request{Chains: []Chain{chainOf(t, hum.chain)}, Rate: hum.rate})
	var names [][]string
	for _, r := range c.Rows {
		names = append(names, r.Names())
	}
	want := [][]string{{"written", "linear"}, {"mixed", "iir", "minimum"}, {"zero"}}
	if diff := cmp.Diff(want, names); diff != "" {
		t.Errorf("rows: %s", diff)
	}
	if len(c.Advice) != len(rules) || c.Asked() != nil {
		t.Errorf("%d advices without a purpose or limits, want one for each of %d purposes", len(c.Advice), len(rules))
	}
}

// TestMixedPhases: which stages mixed lets ring after the sound, and for how long.
// A notch of width B is an impulse less a ring of 2 pi B/fs e^(-pi B t), whose energy
// later than t is pi B/fs e^(-2 pi B t) of the impulse's.
func TestMixedPhases(t *testing.T) {
	c := chainOf(t, `
stages:
  - highpass: {at: 80 Hz, order: 4}
  - notch: {at: 1 kHz, width: 4 Hz}
  - highpass: {pass: 120 Hz, stop: 60 Hz, reject: 50 dB, family: equiripple, phase: linear}
  - bell: {at: 3 kHz, gain: 2 dB, q: 0.9, phase: iir}
  - lowpass: {pass: 5 kHz, stop: 7 kHz, reject: 60 dB, family: kaiser}
  - allpass: {at: 200 Hz, order: 2}
  - fir: {taps: [0.25, 0.5, 0.25]}
  - bell: {at: 100 Hz, gain: 3 dB, q: 2, phase: given}
  - dc: {at: 2 Hz, when: rate > 20 kHz}
`)
	mixed, choices, err := Mixed(c, 16000)
	if err != nil {
		t.Fatal(err)
	}
	var got []filter.Realisation
	for _, s := range mixed.Stages {
		got = append(got, s.Phase)
	}
	want := []filter.Realisation{"iir", "iir", "minimum", "linear", "", "", "", "given", ""}
	if diff := cmp.Diff(want, got); diff != "" || mixed.Phase != filter.Linear {
		t.Errorf("chain %s, stages %s\n%s", mixed.Phase, diff, mixed.Text)
	}
	if len(choices) != 5 {
		t.Fatalf("%d choices, want 5: %v", len(choices), choices)
	}
	const b = math.Pi * 4
	closed := math.Log(1e6*b/16000) / (2 * b) // s until that is -60 dB
	if r := choices[1].Ring; !(math.Abs(r-closed) < 0.05*closed) {
		t.Errorf("a notch 4 Hz wide is said to ring %g s to -60 dB of all, by its closed form %g s", r, closed)
	}
}
