package audio

import (
	"crypto/sha256"
	"errors"
	"fmt"
	"io"
	"math"
	"os"
	"strings"
	"testing"

	"fettle/audio/pcm"
)

// ramp is n different samples between -0.5 and 0.5.
func ramp(n int) []float64 {
	x := make([]float64, n)
	for i := range x {
		x[i] = float64(i)/float64(n) - 0.5
	}
	return x
}

// sine has f cycles a sample.
func sine(n int, f, peak float64) []float64 {
	x := make([]float64, n)
	for i := range x {
		x[i] = peak * math.Sin(2*math.Pi*f*float64(i))
	}
	return x
}

func mustOpen(t testing.TB, path string) *Recording {
	t.Helper()
	r, err := Open(path)
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		if err := r.Close(); err != nil && !errors.Is(err, os.ErrClosed) {
			t.Error(err)
		}
	})
	return r
}

// writeAll writes a whole file and returns its hash.
func writeAll(t testing.TB, path string, spec Spec, samples []float64) string {
	t.Helper()
	w, err := Create(path, spec)
	if err != nil {
		t.Fatal(err)
	}
	if err := w.WriteFrames(samples); err != nil {
		t.Fatal(err)
	}
	if err := w.Commit(); err != nil {
		t.Fatal(err)
	}
	return w.SHA256()
}

// readAll reads a source to its end in calls of the given number of frames.
func readAll(t testing.TB, s Source, frames int) []float64 {
	t.Helper()
	channels := s.Format().NumChannels
	buffer := make([]float64, frames*channels)
	var all []float64
	for {
		n, err := s.ReadFrames(buffer)
		if err == io.EOF && n == 0 {
			return all
		}
		if err != nil || n == 0 {
			t.Fatalf("ReadFrames: %d frames, %v", n, err)
		}
		all = append(all, buffer[:n*channels]...)
	}
}

// mustBeEmpty fails if anything is left in a folder.
func mustBeEmpty(t *testing.T, folder string) {
	t.Helper()
	entries, err := os.ReadDir(folder)
	if err != nil {
		t.Fatal(err)
	}
	for _, e := range entries {
		t.Errorf("left behind: %s", e.Name())
	}
}

// mustEqual compares bit for bit, so that -0 is not 0.
func mustEqual(t testing.TB, got, want []float64) {
	t.Helper()
	if len(got) != len(want) {
		t.Fatalf("%d samples, want %d", len(got), len(want))
	}
	for i := range want {
		if math.Float64bits(got[i]) != math.Float64bits(want[i]) {
			t.Fatalf("sample %d is %v, want %v", i, got[i], want[i])
		}
	}
}

// mustFail wants an error that begins with the path and says everything given.
func mustFail(t testing.TB, err error, path string, say ...string) {
	t.Helper()
	if err == nil || !strings.HasPrefix(err.Error(), path+": ") {
		t.Fatalf("error %v, want one for %s", err, path)
	}
	for _, s := range say {
		if !strings.Contains(err.Error(), s) {
			t.Errorf("%q does not say %q", err, s)
		}
	}
}

// fileHash is the SHA-256 of a file by the standard library alone.
func fileHash(t testing.TB, path string) string {
	t.Helper()
	b, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	return fmt.Sprintf("%x", sha256.Sum256(b))
}

// float32s is a spec that holds any sample.
func float32s(channels int, frames int64) Spec {
	return Spec{Rate: 48000, Channels: channels, Encoding: pcm.Encoding{Float: true, Bytes: 4, Bits: 32}, Frames: frames}
}

// pcm16 is a spec that holds the samples of ramp to half an LSB.
func pcm16(channels int, frames int64) Spec {
	return Spec{Rate: 48000, Channels: channels, Encoding: pcm.Encoding{Bytes: 2, Bits: 16}, Frames: frames}
}
