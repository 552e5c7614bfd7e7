package main

import (
	"math"
	"path/filepath"
	"strings"
	"testing"
)

// TestTrialIsMarked in its name and in the record, beside the whole recording.
func TestTrialIsMarked(t *testing.T) {
	b := newBench(t)
	b.recording("in/deep/a.wav", "pcm16", rate, 1, noise(3*rate, 1))
	trial := []string{"--from", "0:01", "--to", "2.5", b.path("in")}
	b.render(filterChain, trial...).must(t, exitDone)
	b.mustHold("deep/a.trial.wav")
	last := b.last()
	mustEqual(t, "output", last["output"], any("deep/a.trial.wav"))
	mustEqual(t, "from", last["trial_from"], any(float64(rate)))
	mustEqual(t, "to", last["trial_to"], any(2.5*rate))
	mustEqual(t, "frames", last["frames"], any(1.5*rate))
	mustEqual(t, "samples", len(samples(t, filepath.Join(b.Out, "deep/a.trial.wav"))), 3*rate/2)

	b.render(filterChain, trial...).must(t, exitDone) // nothing is left to do
	mustEqual(t, "entries", len(b.record()), 1)
	b.render(filterChain, "--from", "1", b.path("in")).must(t, exitDone) // another stretch
	mustEqual(t, "to", b.last()["trial_to"], any(3.0*rate))

	b.render(filterChain, b.path("in")).must(t, exitDone)
	b.mustHold("deep/a.trial.wav", "deep/a.wav")
	mustEqual(t, "from, of no trial", b.last()["trial_from"], nil)
	mustEqual(t, "to, of no trial", b.last()["trial_to"], nil)
	fettle("verify", b.Out).must(t, exitDone)
}

// TestTrialBeyondTheEnd costs the recordings that are too short.
func TestTrialBeyondTheEnd(t *testing.T) {
	b := newBench(t)
	short := b.recording("in/short.wav", "pcm16", rate, 1, noise(rate/2, 1))
	b.recording("in/deep/long.wav", "pcm16", rate, 1, noise(2*rate, 1))
	b.render(filterChain, "--from", "1", "--to", "1:00", b.path("in")).must(t, exitSomeFailed, short, "holds nothing from 1 s on", "0.500 s long")
	b.mustHold("deep/long.trial.wav")
}

func TestBadTimes(t *testing.T) {
	b := newBench(t)
	in := b.plain("a.wav")
	for _, test := range []struct{ args, words string }{
		{"--from x", `--from: |"x" is no time|1:20`}, {"--to 1:60", `--to: |"1:60"`}, {"--from 2 --to 1", "--to: |1 is not after 2 s"},
		{"--to 0", "--to: |0 is not after 0 s"}, {"--from -1", `--from: |"-1"`},
	} {
		got := b.render(filterChain, append(strings.Fields(test.args), in)...)
		got.must(t, exitNotStarted, strings.Split(test.words, "|")...)
		b.mustHold()
	}
}

// TestTrialOfWhatIsRemoved is aligned with the trial.
func TestTrialOfWhatIsRemoved(t *testing.T) {
	b := newBench(t)
	x := noise(2*rate, 1)
	in := b.recording("a.wav", "float64", rate, 1, x)
	b.render(filterChain, "--removed", b.path("removed"), "--from", "0.5", "--to", "1.5", in).must(t, exitDone)
	out, removed := samples(t, filepath.Join(b.Out, "a.trial.wav")), samples(t, b.path("removed/a.trial.wav"))
	for i := range out {
		// The removed part is below 1 and rounded to 24 bits.
		if d := math.Abs(out[i] + removed[i] - x[rate/2+i]); !(d <= math.Ldexp(1, -25)) {
			t.Fatalf("frame %d: %g and %g are %g off the original", i, out[i], removed[i], d)
		}
	}
}
