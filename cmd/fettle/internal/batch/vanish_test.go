package batch

import (
	"context"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"strings"
	"sync"
	"testing"
)

// TestVanishedInput costs that recording only.
func TestVanishedInput(t *testing.T) {
	in, out := filepath.Join(t.TempDir(), "in"), filepath.Join(t.TempDir(), "out")
	for _, rel := range []string{"a.wav", "deep/b.wav", "c.wav"} {
		recording(t, filepath.Join(in, rel), 100)
	}
	p := newPlan(t, in, out, 1)
	mustDo(t, os.RemoveAll(filepath.Join(in, "deep")))
	s, err := p.Run(context.Background(), &watcher{})
	mustDo(t, err)
	if s.Done != 2 || s.Failed() != 1 || !errors.Is(s.Failures[0], fs.ErrNotExist) || !strings.Contains(s.Failures[0].Error(), "deep/b.wav") {
		t.Errorf("%+v", s)
	}
	if got := files(t, out); len(got) != 2 {
		t.Errorf("the folder holds %q", got)
	}
}

// TestShrunkInput: a recording that is cut while it is read fails, and nothing of
// it appears.
func TestShrunkInput(t *testing.T) {
	for _, removed := range []bool{false, true} {
		dir := t.TempDir()
		in, o := filepath.Join(dir, "in"), Options{Out: filepath.Join(dir, "out"), Jobs: 1, Cores: 1}
		if removed {
			o.Removed = filepath.Join(dir, "removed")
		}
		cut := filepath.Join(in, "deep/a.wav")
		recording(t, cut, 20*block)
		recording(t, filepath.Join(in, "b.wav"), 100)
		p, err := New(parse(t, text), []string{in}, o)
		mustDo(t, err, p.PrepareOut())
		var once sync.Once
		s, err := p.Run(context.Background(), &cutter{cut: func(read int64) {
			if read >= 3*block {
				once.Do(func() { mustDo(t, os.Truncate(cut, 4*block)) })
			}
		}})
		mustDo(t, err)
		if s.Done != 1 || s.Failed() != 1 || !strings.Contains(s.Failures[0].Error(), "deep/a.wav") {
			t.Errorf("%+v", s)
		}
		got := files(t, o.Out)
		if removed {
			got = append(got, files(t, o.Removed)...)
		}
		if want := map[bool]string{false: `["b.wav"]`, true: `["b.wav" "b.wav" "treatment.removed.txt"]`}[removed]; fmt.Sprintf("%q", got) != want {
			t.Errorf("the folders hold %q, want %s", got, want)
		}
	}
}

// cutter acts when bytes were read.
type cutter struct {
	watcher
	cut func(read int64)
}

func (c *cutter) Bytes(n int64) {
	c.watcher.Bytes(n)
	c.mu.Lock()
	defer c.mu.Unlock()
	c.cut(c.bytes)
}

// TestStopOnErrorAbreast: those under way are finished, no more are begun.
func TestStopOnErrorAbreast(t *testing.T) {
	const count = 60
	dir := t.TempDir()
	in := filepath.Join(dir, "in")
	mustDo(t, os.MkdirAll(in, 0o777), os.WriteFile(filepath.Join(in, "00.wav"), []byte("no sound"), 0o666))
	for i := 1; i < count; i++ {
		recording(t, filepath.Join(in, fmt.Sprintf("%02d.wav", i)), 4*block)
	}
	p, err := New(parse(t, text), []string{in}, Options{Out: filepath.Join(dir, "out"), Jobs: 2, Cores: 2, StopOnError: true})
	mustDo(t, err, p.PrepareOut())
	s, err := p.Run(context.Background(), &watcher{})
	mustDo(t, err)
	if s.Failed() != 1 || s.Done > p.workers() || s.Done+s.Left != count-1 {
		t.Errorf("%+v", s)
	}
	past, err := readRecord(p.recordPath())
	mustDo(t, err)
	if len(past) != s.Done+1 || len(files(t, p.Options.Out)) != s.Done {
		t.Errorf("%+v; %d entries; the folder holds %q", s, len(past), files(t, p.Options.Out))
	}
}
