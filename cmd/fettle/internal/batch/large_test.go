package batch

import (
	"bytes"
	"context"
	"os"
	"path/filepath"
	"testing"

	"fettle/audio"
	"fettle/audio/container"
	"fettle/audio/pcm"
	"fettle/filter"
)

// sparse is a recording of silence, in a file that takes no room where the file
// system can leave it out.
func sparse(t *testing.T, path string, spec audio.Spec) {
	t.Helper()
	o, err := spec.Outline()
	mustDo(t, err, os.MkdirAll(filepath.Dir(path), 0o777))
	var tail bytes.Buffer
	mustDo(t, o.WriteTail(&tail))
	f, err := os.Create(path)
	mustDo(t, err, o.WriteHead(f))
	_, err = f.WriteAt(tail.Bytes(), o.Size()-int64(tail.Len()))
	mustDo(t, err, f.Truncate(o.Size()), f.Close())
}

// TestOutgrowsRIFF renders recordings whose outputs are too large for RIFF: with
// a limit of 100 kB, and with the tag large a real one of 5 GiB.
func TestOutgrowsRIFF(t *testing.T) {
	frames, limit := int64(60_000), int64(100_000)
	if realSize {
		frames, limit = 5<<29, 0
	}
	in, out := filepath.Join(t.TempDir(), "in"), filepath.Join(t.TempDir(), "out")
	spec := audio.Spec{Rate: 8000, Channels: 1, Encoding: pcm.Encoding{Bytes: 2, Bits: 16}, Frames: frames, Limit: limit}
	sparse(t, filepath.Join(in, "a.wav"), spec)
	chain, err := filter.Parse([]byte("phase: linear\nstages:\n  - highpass: {at: 100 Hz, order: 2}\n"), "chain.yaml")
	mustDo(t, err)
	o := Options{Out: out, Jobs: 1, Cores: 2, Limit: limit}
	p, err := New(chain, []string{in}, o)
	mustDo(t, err, p.PrepareOut())
	s, err := p.Run(context.Background(), &watcher{})
	mustDo(t, err)
	if s.Done != 1 {
		t.Fatalf("%+v: %v", s, s.Failures)
	}
	r, err := audio.Open(filepath.Join(out, "a.wav"))
	mustDo(t, err)
	defer r.Close()
	if r.Layout().Form != container.RF64 || r.Frames() != frames || len(r.Warnings()) > 0 {
		t.Errorf("form %v, %d frames, warnings %q; want RF64, %d frames and none", r.Layout().Form, r.Frames(), r.Warnings(), frames)
	}
	// Silence comes out as dither of at most a step.
	x := make([]float64, 4096)
	mustDo(t, r.SeekFrame(frames-int64(len(x))))
	n, err := r.ReadFrames(x)
	mustDo(t, err)
	for i, v := range x[:n] {
		if !(v <= 1./(1<<15) && v >= -1./(1<<15)) {
			t.Fatalf("sample %d from the end is %g", n-i, v)
		}
	}
}
