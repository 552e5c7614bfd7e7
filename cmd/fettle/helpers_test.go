package main

import (
	"bufio"
	"bytes"
	"context"
	"crypto/sha256"
	"encoding/json"
	"fmt"
	"io/fs"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"fettle/audio"
	"fettle/audio/pcm"
	"fettle/cmd/fettle/internal/batch"
)

// The tests' usual rate: low, so that audits are short.
const rate = 8000

// Chains by what they do.
const (
	identityChain = "stages: []\n"
	filterChain   = "stages:\n  - highpass: {at: 100 Hz, order: 2}\n"
)

// outcome is what a run of the program came to.
type outcome struct {
	status         int
	stdout, stderr string
}

// fettle runs the program in this process. The command line library keeps its
// help flag in a variable of its package, so that only one can run at a time.
func fettle(args ...string) outcome {
	return fettleIn(context.Background(), args...)
}

func fettleIn(ctx context.Context, args ...string) outcome {
	var stdout, stderr bytes.Buffer
	status := run(ctx, append([]string{"fettle"}, args...), &stdout, &stderr)
	return outcome{status, stdout.String(), stderr.String()}
}

// must checks the exit status and that standard error is empty, or holds
// nothing but lines of the program's own and all of these words.
func (o outcome) must(t *testing.T, status int, words ...string) {
	t.Helper()
	if o.status != status {
		t.Errorf("status %d, want %d; stderr %q", o.status, status, o.stderr)
	}
	if len(words) == 0 && o.stderr != "" {
		t.Errorf("stderr %q, want nothing", o.stderr)
	}
	for line := range strings.Lines(o.stderr) {
		if !strings.HasPrefix(line, "fettle: ") || !strings.HasSuffix(line, "\n") || strings.Count(line, "fettle: ") != 1 {
			t.Errorf("stderr line %q, want one that begins with one \"fettle: \"", line)
		}
	}
	for _, word := range words {
		if !strings.Contains(o.stderr, word) {
			t.Errorf("stderr %q does not say %q", o.stderr, word)
		}
	}
}

// bench is a place of work: chains and recordings in, outputs in Out.
type bench struct {
	t        *testing.T
	Dir, Out string
}

func newBench(t *testing.T) *bench {
	dir := t.TempDir()
	return &bench{t, dir, filepath.Join(dir, "out")}
}

// path is a path below the bench's folder.
func (b *bench) path(rel string) string { return filepath.Join(b.Dir, rel) }

// file writes bytes.
func (b *bench) file(rel string, content []byte) string {
	b.t.Helper()
	path := b.path(rel)
	mustDo(b.t, os.MkdirAll(filepath.Dir(path), 0o777), os.WriteFile(path, content, 0o666))
	return path
}

func (b *bench) chain(text string) string { return b.file("chain.yaml", []byte(text)) }

// recording writes a WAV file of samples in a format, such as "pcm16".
func (b *bench) recording(rel, format string, rate, channels int, samples []float64) string {
	b.t.Helper()
	path := b.path(rel)
	mustDo(b.t, os.MkdirAll(filepath.Dir(path), 0o777))
	e, err := pcm.ParseEncoding(format)
	mustDo(b.t, err)
	w, err := audio.Create(path, audio.Spec{Rate: rate, Channels: channels, Encoding: e, Frames: int64(len(samples) / channels)})
	mustDo(b.t, err, w.WriteFrames(samples), w.Commit())
	return path
}

// plain is a recording that nothing is special about.
func (b *bench) plain(rel string) string {
	return b.recording(rel, "pcm16", rate, 1, noise(301, 1))
}

// render runs render with this chain into Out.
func (b *bench) render(chain string, args ...string) outcome {
	b.t.Helper()
	return fettle(append([]string{"render", "--chain", b.chain(chain), "--out", b.Out}, args...)...)
}

// outputs lists the files below Out, and folders that hold nothing.
func (b *bench) outputs() []string {
	b.t.Helper()
	var out []string
	err := filepath.WalkDir(b.Out, func(path string, e fs.DirEntry, err error) error {
		if err != nil || path == b.Out {
			return err
		}
		if e.IsDir() {
			if inside, err := os.ReadDir(path); err != nil || len(inside) > 0 {
				return err
			}
		}
		rel, err := filepath.Rel(b.Out, path)
		out = append(out, rel)
		return err
	})
	if !os.IsNotExist(err) {
		mustDo(b.t, err)
	}
	return out
}

// mustHold checks that Out holds these files, and a treatment record at most.
func (b *bench) mustHold(want ...string) {
	b.t.Helper()
	var got []string
	for _, rel := range b.outputs() {
		if rel != batch.RecordName {
			got = append(got, rel)
		}
	}
	if fmt.Sprintf("%q", got) != fmt.Sprintf("%q", want) {
		b.t.Errorf("the output folder holds %q, want %q", got, want)
	}
}

// record reads the treatment record, in its order.
func (b *bench) record() []map[string]any {
	b.t.Helper()
	return b.recordNamed(batch.RecordName)
}

// recordNamed reads a record by its file's name.
func (b *bench) recordNamed(file string) []map[string]any {
	b.t.Helper()
	f, err := os.Open(filepath.Join(b.Out, file))
	mustDo(b.t, err)
	defer f.Close()
	var out []map[string]any
	for s := bufio.NewScanner(f); s.Scan(); {
		var entry map[string]any
		mustDo(b.t, json.Unmarshal(s.Bytes(), &entry))
		out = append(out, entry)
	}
	return out
}

// last is the last entry of the record.
func (b *bench) last() map[string]any {
	b.t.Helper()
	all := b.record()
	return all[len(all)-1]
}

// output reads an output's bytes.
func (b *bench) output(rel string) []byte {
	b.t.Helper()
	return read(b.t, filepath.Join(b.Out, rel))
}

func read(t *testing.T, path string) []byte {
	t.Helper()
	raw, err := os.ReadFile(path)
	mustDo(t, err)
	return raw
}

func hash(t *testing.T, path string) string {
	t.Helper()
	return fmt.Sprintf("%x", sha256.Sum256(read(t, path)))
}

func mustDo(t *testing.T, errs ...error) {
	t.Helper()
	for _, err := range errs {
		if err != nil {
			t.Fatal(err)
		}
	}
}

func mustEqual[T comparable](t *testing.T, what string, got, want T) {
	t.Helper()
	if got != want {
		t.Errorf("%s: %v, want %v", what, got, want)
	}
}

// mustBeNear checks a figure of a record to within tol.
func mustBeNear(t *testing.T, what string, got any, want, tol float64) {
	t.Helper()
	x, ok := got.(float64)
	if !ok || !(math.Abs(x-want) <= tol) {
		t.Errorf("%s: %v, want %g within %g", what, got, want, tol)
	}
}

// noise is samples from -0.25 to 0.25 on a grid of 8 bits, which every format
// holds exactly; a plain congruential generator (Knuth, The Art of Computer
// Programming 2, 3.3.4 lists its multiplier 1664525).
func noise(n int, seed uint32) []float64 {
	out := make([]float64, n)
	for i := range out {
		seed = seed*1664525 + 1013904223
		out[i] = float64(int(seed>>26)-32) / 128
	}
	return out
}

// tone is a sine of some peak, cycles per sample and phase in radians.
func tone(n int, peak, cycles, phase float64) []float64 {
	out := make([]float64, n)
	for i := range out {
		out[i] = peak * math.Sin(2*math.Pi*cycles*float64(i)+phase)
	}
	return out
}
