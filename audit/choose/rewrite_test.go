package choose

import (
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"fettle/filter"

	"github.com/google/go-cmp/cmp"
)

func TestRewrite(t *testing.T) {
	for _, c := range []struct{ before, after string }{
		{"stages:\n  - highpass: {at: 70 Hz, order: 4}\n", "phase: linear\nstages:\n  - highpass: {phase: iir, at: 70 Hz, order: 4}\n"},
		{"name: x # first\nstages:\n- highpass:\n    at: 70 Hz\n    order: 4 # last\n", "name: x # first\nphase: linear\nstages:\n- highpass:\n    phase: iir\n    at: 70 Hz\n    order: 4 # last\n"},
		{"phase: 'minimum'\nstages: [highpass: {at: 70 Hz, phase: \"linear\", order: 4}]\n", "phase: linear\nstages: [highpass: {at: 70 Hz, phase: iir, order: 4}]\n"},
		{"{name: Überfahrt, stages: [{highpass: {at: 70 Hz, order: 4}}]}", "{name: Überfahrt, phase: linear, stages: [{highpass: {phase: iir, at: 70 Hz, order: 4}}]}"},
		{"stages:\r\n  - highpass: { # low\r\n      at: 70 Hz, order: 4 }\r\nphase: zero\r\n", "stages:\n  - highpass: { # low\n      phase: iir, at: 70 Hz, order: 4 }\nphase: linear\n"},
	} {
		chain := chainOf(t, c.before)
		got, err := rewrite(chain.Text, phases{filter.Linear, []filter.Realisation{filter.IIR}})
		if err != nil {
			t.Fatal(err)
		}
		if diff := cmp.Diff(c.after, string(got)); diff != "" {
			t.Errorf("%s", diff)
		}
		chainOf(t, string(got)) // can be read
	}
}

// TestRewriteSamples: phases can be written into every sample chain, and what its
// stages do but for their phase stays.
func TestRewriteSamples(t *testing.T) {
	files, err := filepath.Glob("../../samples/chains/*.yaml")
	if err != nil || len(files) < 3 {
		t.Fatalf("%d sample chains: %v", len(files), err)
	}
	for _, file := range files {
		c, err := Load(file)
		if err != nil {
			t.Fatal(err)
		}
		p := phases{filter.Zero, slices.Repeat([]filter.Realisation{filter.Minimum}, len(c.Stages))}
		to, err := c.rephased(p)
		if err != nil {
			t.Fatal(err)
		}
		back, err := to.rephased(phases{filter.Linear, slices.Repeat([]filter.Realisation{filter.Linear}, len(c.Stages))})
		if err != nil {
			t.Fatal(err)
		}
		for i, s := range back.Stages {
			without := func(text string) string {
				return strings.NewReplacer("phase: linear, ", "", ", phase: linear", "").Replace(text)
			}
			if without(s.Text) != without(c.Stages[i].Text) || s.Phase != filter.Linear || to.Stages[i].Phase != filter.Minimum {
				t.Errorf("%s: %q became %q", file, c.Stages[i].Text, s.Text)
			}
		}
	}
}

// TestSaveRealisesAsAdvised for every realisation of a chain with stages of every
// sort: Save itself compares what it gives with what was audited, and what it
// gives keeps the remarks.
func TestSaveRealisesAsAdvised(t *testing.T) {
	c := chainOf(t, `# keep me
phase: minimum
stages:
  - highpass: {at: 100 Hz, order: 2}
  - bell: {at: 1 kHz, gain: 3 dB, q: 1, phase: linear}
  - biquads: {sections: [[1, 0.2, 0.1, 1, -0.3, 0.1]]}
  - notch: {at: 600 Hz, width: 60 Hz, phase: given}
  - allpass: {at: 500 Hz}
`)
	for _, name := range []string{"written", "linear", "minimum", "iir", "given", "mixed"} {
		n := newCandidate(c, name, 8000)
		if n.Refused != nil {
			t.Fatalf("%s: %v", name, n.Refused)
		}
		text, err := n.Save()
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		if !strings.HasPrefix(string(text), "# keep me\n") || !strings.Contains(string(text), "width: 60 Hz, phase: given") {
			t.Errorf("%s: %s", name, text)
		}
		again, err := chainOf(t, string(text)).Realise(8000, filter.Written)
		if err != nil {
			t.Fatal(err)
		}
		if apart, _ := n.Agrees(&Candidate{Chain: c, Filter: again}); !(apart < savedApart) {
			t.Errorf("%s: saved, it is %g dB off", name, apart)
		}
	}
}

// TestSaveRefuses what would not be what was audited.
func TestSaveRefuses(t *testing.T) {
	c := chainOf(t, "stages:\n  - highpass: {at: 100 Hz, order: 2}\n")
	n := newCandidate(c, "linear", 8000)
	n.Chain.Text = []byte("stages:\n  - highpass: {at: 200 Hz, order: 2}\n")
	if _, err := n.Save(); err == nil || !strings.Contains(err.Error(), "differ") {
		t.Errorf("a text of another chain is saved: %v", err)
	}
}
