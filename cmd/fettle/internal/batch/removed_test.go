package batch

import (
	"math"
	"path/filepath"
	"testing"
)

// TestRemoved: output and what was removed add up to the original, lowered by
// the headroom, sample by sample.
func TestRemoved(t *testing.T) {
	const frames = 50_000
	const stages = "stages:\n  - highpass: {at: 100 Hz, order: 4}\n"
	dir := t.TempDir()
	in := filepath.Join(dir, "in", "deep", "a.wav")
	x := float64s(t, in, frames)
	for _, phase := range []string{"linear", "iir", "zero"} {
		chain := parse(t, "phase: "+phase+"\n"+stages)
		for _, db := range []float64{0, 3} {
			for _, s := range []Stretch{{}, {1, 2}} {
				o := Options{Out: filepath.Join(dir, "out"), Removed: filepath.Join(dir, "removed"), Headroom: Headroom{DB: db}, Stretch: s, Jobs: 1}
				rel := s.rename("deep/a.wav")
				e := renderAll(t, chain, filepath.Join(dir, "in"), o)[rel]
				path := filepath.Join(o.Removed, rel)
				if e.Removed != name(absolute(path)) || !hasHash(path, e.SHA256Removed) {
					t.Errorf("recorded as %s, %s", e.Removed, e.SHA256Removed)
				}
				from, to := 0, frames
				if !s.none() {
					from, to = trialRate, 2*trialRate
				}
				sum := readAll(t, filepath.Join(o.Out, rel))
				removed := readAll(t, path)
				if len(removed) != len(sum) {
					t.Fatalf("%d samples removed of %d", len(removed), len(sum))
				}
				want := make([]float64, len(sum))
				gain := math.Pow(10, -db/20)
				most := 0.0
				for i := range sum {
					sum[i] += removed[i]
					want[i] = gain * x[2*from+i]
					most = max(most, math.Abs(removed[i]))
				}
				// What is removed has the 24 bits of 32-bit float, and is rounded.
				if worst := farthest(t, sum, want); !(worst <= math.Ldexp(most, -24)) || to-from != len(sum)/2 {
					t.Errorf("%s, %g dB, %v: up to %.3g off the original", phase, db, s, worst)
				}
				if most < 0.1 { // the offset of 0.25, at least
					t.Errorf("%s: nothing was removed", phase)
				}
			}
		}
	}
}

// TestNothingRemoved by a chain that does nothing.
func TestNothingRemoved(t *testing.T) {
	dir := t.TempDir()
	in := filepath.Join(dir, "a.wav")
	float64s(t, in, 20_000)
	renderAll(t, parse(t, "stages: []\n"), in, Options{Out: filepath.Join(dir, "out"), Removed: filepath.Join(dir, "removed")})
	for i, v := range readAll(t, filepath.Join(dir, "removed", "a.wav")) {
		if v != 0 {
			t.Fatalf("sample %d is %g", i, v)
		}
	}
}
