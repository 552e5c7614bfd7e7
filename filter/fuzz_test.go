package filter

import (
	"bytes"
	"errors"
	"os"
	"path/filepath"
	"testing"
)

// Any text is a chain or an error of the chain, with a place inside the text.
// Texts that could name files are passed by: what is read must come from the
// fuzzer.
func FuzzParse(f *testing.F) {
	samples, err := filepath.Glob("../samples/chains/*.yaml")
	if err != nil || len(samples) == 0 {
		f.Fatalf("no sample chains: %v", err)
	}
	for _, path := range samples {
		text, err := os.ReadFile(path)
		if err != nil {
			f.Fatal(err)
		}
		f.Add(text)
	}
	for _, text := range chains {
		f.Add([]byte(text))
	}
	for _, text := range []string{
		in("fir: {taps: [0.25, 0.5, 0.25]}"),
		in("biquads: {sections: [[1, 0, 0, 1, -0.5, 0]]}"),
		in("delay:\n      by: 2 ms\n      when: rate > 1 Hz\n      channels: [1]"),
		"stages: []\nalign: {to: centroid, fraction: true}\nedges: hold\ntolerance: 0.2 dB\n",
		"a: &a [x, x]\nb: &b [*a, *a]\nc: &c [*b, *b]\n",
		"name: |\n  x\n  y\n---\n? [\n",
	} {
		f.Add([]byte(text))
	}
	f.Fuzz(func(t *testing.T, text []byte) {
		if bytes.Contains(text, []byte("file")) || len(text) > 1<<16 {
			return
		}
		c, err := Parse(text, "chain.yaml")
		if err == nil {
			checkSound(t, c)
			return
		}
		var e *ChainError
		if !errors.As(err, &e) {
			t.Fatalf("%v is no ChainError", err)
		}
		if lines := 1 + bytes.Count(text, []byte("\n")) + bytes.Count(text, []byte("\r")); e.Line < 0 || e.Line > lines || e.Line > 0 && e.Column < 1 {
			t.Errorf("%v is outside the text's %d lines", err, lines)
		}
	})
}

// checkSound tells whether a chain that was accepted can be planned: at a rate
// that holds any frequency every stage is sound or would ring too long, never
// without bounds.
func checkSound(t *testing.T, c *Chain) {
	for i, s := range c.Stages {
		p, err := s.plan(ampleRate)
		if err != nil {
			continue
		}
		if !(p.gain > 0 && p.gain <= 1e10) || !(p.delay >= 0 && p.delay <= maxSeconds*ampleRate) {
			t.Errorf("stage %d, %s: a gain of %g and a delay of %g samples", i+1, s.Kind, p.gain, p.delay)
		}
		if err := checkRing(p.sections); err != nil {
			t.Errorf("stage %d, %s: %v", i+1, s.Kind, err)
		}
	}
}
