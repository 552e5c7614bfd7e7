package batch

import (
	"context"
	"math"
	"math/cmplx"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"fettle/audio"
	"fettle/audio/pcm"
	"fettle/audit/pair"
)

// hissing writes a recording of noise.
func hissing(t *testing.T, path string, frames int) {
	t.Helper()
	mustDo(t, os.MkdirAll(filepath.Dir(path), 0o777))
	x := make([]float64, frames)
	seed := uint32(1)
	for i := range x {
		seed = seed*1664525 + 1013904223
		x[i] = float64(int32(seed)) / (1 << 32)
	}
	w, err := audio.Create(path, audio.Spec{Rate: 8000, Channels: 1, Encoding: pcm.Encoding{Bytes: 2, Bits: 16}, Frames: int64(frames)})
	mustDo(t, err, w.WriteFrames(x), w.Commit())
}

// TestProofOfAlignment: an output is in step with what the chain ought to give, and
// one that is not, by a sample or two hundredths of one, upside down or something
// else altogether, fails and does not appear. The chain's response is what is falsified.
func TestProofOfAlignment(t *testing.T) {
	for name, c := range map[string]struct {
		falsify func(k int, h complex128) complex128
		says    string
	}{
		"right":               {func(_ int, h complex128) complex128 { return h }, ""},
		"late by a sample":    {late(1), "-1.000 samples"},
		"early by a fiftieth": {late(-0.02), "0.020 samples"},
		"late by 300":         {late(300), "-299.99"},
		"inverted":            {func(_ int, h complex128) complex128 { return -h }, "inverted"},
		"late by 3000":        {late(3000), "not what the chain makes"},
	} {
		t.Run(name, func(t *testing.T) {
			in, out := filepath.Join(t.TempDir(), "in"), filepath.Join(t.TempDir(), "out")
			hissing(t, filepath.Join(in, "a.wav"), 100_000)
			p := newPlan(t, in, out, 1)
			f, err := p.Filter(Use{p.Jobs[0].Chain, 8000})
			mustDo(t, err)
			known := p.known(f, f.PathOf(1))
			for k := range known {
				known[k] = c.falsify(k, known[k])
			}
			s, err := p.Run(context.Background(), &watcher{})
			mustDo(t, err)
			if c.says == "" {
				if s.Done != 1 {
					t.Errorf("%+v: %v", s, s.Failures)
				}
				return
			}
			if s.Done != 0 || !strings.Contains(s.Failures.Error(), c.says) {
				t.Errorf("%+v: %v, want %q", s, s.Failures, c.says)
			}
			if left := files(t, out); len(left) > 0 {
				t.Errorf("left behind: %q", left)
			}
		})
	}
}

// late falsifies a response by a delay, so that the output seems early.
func late(samples float64) func(k int, h complex128) complex128 {
	return func(k int, h complex128) complex128 {
		return h * cmplx.Rect(1, -2*math.Pi*float64(k)*samples/pair.AlignmentSize)
	}
}

// TestNothingToProve: of silence nothing is stated, and nothing fails.
func TestNothingToProve(t *testing.T) {
	in, out := filepath.Join(t.TempDir(), "in"), filepath.Join(t.TempDir(), "out")
	recording(t, filepath.Join(in, "a.wav"), 50_000)
	recording(t, filepath.Join(in, "short.wav"), 1)
	p := newPlan(t, in, out, 1)
	s, err := p.Run(context.Background(), &watcher{})
	mustDo(t, err)
	past, err := readPast(out)
	mustDo(t, err)
	for rel, e := range past {
		if s.Done != 2 || e.Alignment != nil || e.AlignmentNotStated == "" {
			t.Errorf("%s: %v, %q", rel, e.Alignment, e.AlignmentNotStated)
		}
	}
}
