package batch

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"testing"

	"fettle/audio"
	"fettle/audio/pcm"
	"fettle/filter"
)

const trialRate = 8000

// float64s writes noise with an offset, from -0.25 to 0.75, as 64-bit float in
// stereo, and gives it.
func float64s(t *testing.T, path string, frames int) []float64 {
	t.Helper()
	r := rand.New(rand.NewPCG(1, 2))
	x := make([]float64, 2*frames)
	for i := range x {
		x[i] = r.Float64() - 0.25
	}
	mustDo(t, os.MkdirAll(filepath.Dir(path), 0o777))
	w, err := audio.Create(path, audio.Spec{Rate: trialRate, Channels: 2, Encoding: pcm.Encoding{Float: true, Bytes: 8, Bits: 64}, Frames: int64(frames)})
	mustDo(t, err, w.WriteFrames(x), w.Commit())
	return x
}

// readAll gives all samples of a recording.
func readAll(t *testing.T, path string) []float64 {
	t.Helper()
	r, err := audio.Open(path)
	mustDo(t, err)
	defer r.Close()
	x := make([]float64, int(r.Frames())*r.Format().NumChannels)
	for at := 0; at < len(x); {
		n, err := r.ReadFrames(x[at:])
		mustDo(t, err)
		at += n * r.Format().NumChannels
	}
	return x
}

func parse(t *testing.T, chain string) *filter.Chain {
	t.Helper()
	c, err := filter.Parse([]byte(chain), "chain.yaml")
	mustDo(t, err)
	return c
}

// realised saves designs for tests that use a chain many times.
var realised = map[Use]func() (*filter.Filter, error){}

// renderAll runs a batch to its end, without failures, and gives its entries.
func renderAll(t *testing.T, chain *filter.Chain, in string, o Options) map[string]*Entry {
	t.Helper()
	o.Cores = max(1, o.Cores)
	p, err := New(chain, []string{in}, o)
	mustDo(t, err, p.PrepareOut())
	p.made = realised
	s, err := p.Run(context.Background(), &watcher{})
	mustDo(t, err)
	if s.Failed() > 0 {
		t.Fatal(s.Failures)
	}
	past, err := readRecord(p.recordPath())
	mustDo(t, err)
	return past
}

// TestTrial: a stretch comes out as it does of the whole recording, at its start,
// in its middle and at its end, whatever stands before and after.
func TestTrial(t *testing.T) {
	// The notch, 4 Hz wide, rings longest; the other channel is delayed alike.
	const stages = "stages:\n  - highpass: {at: 100 Hz, order: 4}\n  - notch: {at: 50 Hz, width: 4 Hz, channels: [1]}\n"
	phases := []struct {
		name string
		// How far a stretch may stray from the whole. Kernels are applied by
		// transforms, whose blocks lie elsewhere in a stretch: rounding has an RMS
		// of 1.1e-16 times the root of log2 N times that of the samples (Schatzman
		// 1996, "Accuracy of the discrete Fourier transform and the fast Fourier
		// transform"), here three transforms of 2^16 points at most and samples
		// below 0.75, and its crest is ten times that at most.
		within float64
	}{
		{"linear", 10 * 1.1e-16 * math.Sqrt(3*16) * 0.75},
		{"minimum", 10 * 1.1e-16 * math.Sqrt(3*16) * 0.75},
		// A recursive filter starts from rest where its impulse response is below
		// 1e-15 of its peak. What it forgets decays by the notch's pole radius.
		{"iir", 1e-15 / (math.Pi * 4 / trialRate) * 0.75},
		// A backward run starts from rest at the end of each of its chunks, which
		// lie elsewhere in a stretch: both lose less than 1e-7 of full scale.
		{"zero", 2e-7},
	}
	const frames = 60_000
	stretches := []Stretch{{0, 0.01}, {0, 1}, {0.01, 0.3}, {3, 4}, {7.49, 7.5}, {7, math.Inf(1)}, {0, math.Inf(1)}}
	dir := t.TempDir()
	in := filepath.Join(dir, "in", "a.wav")
	float64s(t, in, frames)
	for _, phase := range phases {
		for _, edges := range []string{"silence", "hold", "mirror"} {
			chain := parse(t, fmt.Sprintf("phase: %s\nedges: %s\n%s", phase.name, edges, stages))
			out := filepath.Join(dir, phase.name, edges)
			renderAll(t, chain, in, Options{Out: out})
			whole := readAll(t, filepath.Join(out, "a.wav"))
			for _, s := range stretches {
				e := renderAll(t, chain, in, Options{Out: out, Stretch: s})["a.trial.wav"]
				from, to := int(s.From*trialRate), int(min(s.To*trialRate, frames))
				if *e.TrialFrom != int64(from) || *e.TrialTo != int64(to) || e.Frames != int64(to-from) {
					t.Errorf("%v is recorded as %d to %d, %d frames", s, *e.TrialFrom, *e.TrialTo, e.Frames)
				}
				got := readAll(t, filepath.Join(out, "a.trial.wav"))
				if worst := farthest(t, got, whole[2*from:2*to]); !(worst <= phase.within) {
					t.Errorf("%s, %s, %v: up to %.3g from the whole, want %.3g at most", phase.name, edges, s, worst, phase.within)
				}
			}
		}
	}
}

// farthest is the greatest difference of two signals of one length.
func farthest(t *testing.T, a, b []float64) float64 {
	t.Helper()
	if len(a) != len(b) || len(a) == 0 {
		t.Fatalf("%d samples against %d", len(a), len(b))
	}
	worst := 0.0
	for i := range a {
		if d := math.Abs(a[i] - b[i]); !(d <= worst) {
			worst = d
		}
	}
	return worst
}

// TestTrialOfTheMeters: levels are those of the stretch, not of what is filtered
// with it.
func TestTrialOfTheMeters(t *testing.T) {
	dir := t.TempDir()
	in := filepath.Join(dir, "a.wav")
	w, err := audio.Create(in, audio.Spec{Rate: trialRate, Channels: 1, Encoding: pcm.Encoding{Float: true, Bytes: 8, Bits: 64}, Frames: 20_000})
	mustDo(t, err)
	x := make([]float64, 20_000)
	for i := range x {
		x[i] = 0.9
		if i >= 8000 && i < 9000 {
			x[i] = 0.1 * float64(i%2)
		}
	}
	mustDo(t, w.WriteFrames(x), w.Commit())
	chain := parse(t, "phase: linear\nstages:\n  - highpass: {at: 100 Hz, order: 2}\n")
	e := renderAll(t, chain, in, Options{Out: filepath.Join(dir, "out"), Stretch: Stretch{1, 1.125}})["a.trial.wav"]
	if e.PeakIn == nil || math.Abs(*e.PeakIn+20) > 1e-12 {
		t.Errorf("peak before %v dB, want -20", e.PeakIn)
	}
}
