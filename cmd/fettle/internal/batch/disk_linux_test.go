package batch

import (
	"context"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"syscall"
	"testing"

	"fettle/audio"
	"fettle/audio/needs"
	"fettle/audio/pcm"
)

// mount puts a file system of so many MiB in memory at a folder, which it makes.
func mount(t *testing.T, path string, mib int, flags uintptr) {
	t.Helper()
	if os.Geteuid() != 0 {
		needs.Missing(t, "missing: root, to mount a small file system")
	}
	mustDo(t, os.MkdirAll(path, 0o777))
	if err := syscall.Mount("tmpfs", path, "tmpfs", flags, fmt.Sprintf("size=%dm", mib)); err != nil {
		needs.Missing(t, "missing: the right to mount a small file system: %v", err)
	}
	t.Cleanup(func() { mustDo(t, syscall.Unmount(path, 0)) })
}

// noisy writes a recording of so many MiB in 32 bits of which no two blocks are
// alike.
func noisy(t *testing.T, path string, mib int) {
	t.Helper()
	frames := mib << 18
	mustDo(t, os.MkdirAll(filepath.Dir(path), 0o777))
	w, err := audio.Create(path, audio.Spec{Rate: 8000, Channels: 1, Encoding: pcm.Encoding{Bytes: 4, Bits: 32}, Frames: int64(frames)})
	mustDo(t, err)
	block := make([]float64, 1<<16)
	for at := 0; at < frames; at += len(block) {
		for i := range block {
			block[i] = float64((at+i)*7919%65536)/131072 - 0.25
		}
		mustDo(t, w.WriteFrames(block))
	}
	mustDo(t, w.Commit())
}

// fill takes all that is free on a file system but so many MiB, with one file.
func fill(t *testing.T, path string, spare int) {
	t.Helper()
	free, ok := freeSpace(filepath.Dir(path))
	if !ok {
		t.Fatal("it is not known what is free")
	}
	f, err := os.Create(path)
	mustDo(t, err, syscall.Fallocate(int(f.Fd()), 0, 0, free-int64(spare)<<20), f.Close())
}

// TestDiskFillsUp: an output folder of 64 MiB, which somebody else fills up while
// the batch is under way. What no longer fits fails and says why, what is there is
// whole, and once there is room the rest is done.
func TestDiskFillsUp(t *testing.T) {
	const count, size = 12, 4
	dir := t.TempDir()
	in, right, out := filepath.Join(dir, "in"), filepath.Join(dir, "right"), filepath.Join(dir, "out")
	mount(t, out, 64, 0)
	for i := range count {
		noisy(t, filepath.Join(in, fmt.Sprintf("%02d/a.wav", i)), size)
	}
	_, err := newPlan(t, in, right, 2).Run(context.Background(), &watcher{})
	mustDo(t, err)

	filler := filepath.Join(out, "filler")
	w := &watcher{act: func(finished int) {
		if finished == 3 {
			fill(t, filler, 2*size+1)
		}
	}}
	s, err := newPlan(t, in, out, 1).Run(context.Background(), w)
	mustDo(t, err)
	// Two more fit beside the filler.
	if s.Done != 5 || s.Failed() != count-5 {
		t.Errorf("%+v, want 5 done and the rest failed", s)
	}
	for _, err := range s.Failures {
		if !errors.Is(err, syscall.ENOSPC) || !strings.Contains(err.Error(), filepath.Join(out, "")) || !strings.Contains(err.Error(), "free space, or choose another folder") {
			t.Errorf("failure %v, want one that tells of the full disk and what to do", err)
		}
	}
	mustDo(t, os.Remove(filler))
	past, err := readRecord(filepath.Join(out, RecordName))
	mustDo(t, err)
	there := 0
	for rel, e := range past {
		sum, _, err := hashFile(filepath.Join(out, rel))
		switch {
		case e.Status == StatusFailed && !errors.Is(err, os.ErrNotExist):
			t.Errorf("%s has failed and is there: %v", rel, err)
		case e.Status == StatusDone && !hasHash(filepath.Join(right, rel), sum):
			t.Errorf("%s is damaged: %v", rel, err)
		case e.Status == StatusDone:
			there++
		}
	}
	if left := files(t, out); len(past) != count || len(left) != 2*there {
		t.Errorf("%d entries; the folder holds %q", len(past), left)
	}

	s, err = newPlan(t, in, out, 2).Run(context.Background(), &watcher{})
	mustDo(t, err)
	if s.Skipped != 5 || s.Done != count-5 || s.Failed() != 0 {
		t.Errorf("with room again: %+v", s)
	}
	mustBeAlike(t, out, right)
}

// mustBeAlike checks that two folders hold the same outputs.
func mustBeAlike(t *testing.T, got, want string) {
	t.Helper()
	if g, w := fmt.Sprintf("%q", files(t, got)), fmt.Sprintf("%q", files(t, want)); g != w {
		t.Errorf("%s holds %s, %s %s", got, g, want, w)
	}
	for _, rel := range files(t, want) {
		if filepath.Ext(rel) != ".wav" {
			continue
		}
		sum, _, err := hashFile(filepath.Join(want, rel))
		mustDo(t, err)
		if !hasHash(filepath.Join(got, rel), sum) {
			t.Errorf("%s: other bytes in %s than in %s", rel, got, want)
		}
	}
}

// TestRecordOnAFullDisk: where not even a line of the record fits, the batch stops,
// and the next run takes it up with what is recorded.
func TestRecordOnAFullDisk(t *testing.T) {
	const count = 40
	dir := t.TempDir()
	in, out, right := filepath.Join(dir, "in"), filepath.Join(dir, "out"), filepath.Join(dir, "right")
	mount(t, out, 4, 0)
	for i := range count {
		recording(t, filepath.Join(in, fmt.Sprintf("%02d.wav", i)), 1000)
	}
	_, err := newPlan(t, in, right, 2).Run(context.Background(), &watcher{})
	mustDo(t, err)
	filler := filepath.Join(out, "filler")
	w := &watcher{act: func(finished int) {
		if finished == 5 {
			fill(t, filler, 0)
		}
	}}
	s, err := newPlan(t, in, out, 1).Run(context.Background(), w)
	if s.Done+s.Failed()+s.Left != count || s.Done < 4 || s.Done == count {
		t.Errorf("%+v", s)
	}
	if err != nil && (!errors.Is(err, syscall.ENOSPC) || !strings.Contains(err.Error(), RecordName)) {
		t.Errorf("error %v, want one of the record", err)
	}
	mustDo(t, os.Remove(filler))
	s, err = newPlan(t, in, out, 2).Run(context.Background(), &watcher{})
	mustDo(t, err)
	if s.Failed() != 0 || s.Skipped+s.Done != count {
		t.Errorf("with room again: %+v", s)
	}
	mustBeAlike(t, out, right)
}

// TestTooLittleSpace is found before anything is done, wherever it is too little.
func TestTooLittleSpace(t *testing.T) {
	dir := t.TempDir()
	in, small, large := filepath.Join(dir, "in"), filepath.Join(dir, "small"), filepath.Join(dir, "large")
	mount(t, small, 4, 0)
	mount(t, large, 64, 0)
	noisy(t, filepath.Join(in, "a.wav"), 2)
	noisy(t, filepath.Join(in, "b.wav"), 2)
	tests := []struct {
		name string
		o    Options
		word string // of the refusal; "": there is room
	}{
		{"room", Options{Out: large}, ""},
		{"room for both", Options{Out: large, Removed: filepath.Join(large, "x")}, ""},
		{"too small", Options{Out: small}, "the output folder " + small + ": about 4.2 MB will be written there, and 4.2 MB are free"},
		{"too small below", Options{Out: filepath.Join(small, "not", "yet")}, "output folder " + filepath.Join(small, "not", "yet")},
		{"too small for what is removed", Options{Out: large, Removed: small}, "the folder for what is removed " + small + ": about 4.2 MB"},
		{"too small for both", Options{Out: filepath.Join(small, "a"), Removed: filepath.Join(small, "b"), Stretch: Stretch{0, 60}}, "about 7.7 MB"},
		{"a trial", Options{Out: small, Stretch: Stretch{0, 1}}, ""},
		{"half the bytes", Options{Out: small, Encoding: &pcm.Encoding{Bytes: 2, Bits: 16}}, ""},
	}
	for _, test := range tests {
		_, err := New(parse(t, text), []string{in}, test.o)
		switch {
		case test.word == "" && err != nil:
			t.Errorf("%s: %v", test.name, err)
		case test.word != "" && (err == nil || !strings.Contains(err.Error(), test.word) || !strings.Contains(err.Error(), "make room")):
			t.Errorf("%s: %v, want %q", test.name, err, test.word)
		}
	}
	if left := append(files(t, small), files(t, large)...); len(left) > 0 {
		t.Errorf("planning made %q", left)
	}

	// What a killed run left gives its space back.
	left := filepath.Join(small, ".a.wav1234567890123456789")
	mustDo(t, os.WriteFile(left, make([]byte, 2<<20), 0o666))
	mustDo(t, os.Remove(filepath.Join(in, "b.wav")))
	if _, err := New(parse(t, text), []string{in}, Options{Out: small}); err != nil {
		t.Errorf("beside %s: %v", left, err)
	}
	mustDo(t, os.Rename(left, filepath.Join(small, "notes")))
	if _, err := New(parse(t, text), []string{in}, Options{Out: small}); err == nil {
		t.Error("no error beside notes")
	}
}

// TestReadOnlyFolder: what would go there fails, the rest is done.
func TestReadOnlyFolder(t *testing.T) {
	dir := t.TempDir()
	in, out := filepath.Join(dir, "in"), filepath.Join(dir, "out")
	for _, rel := range []string{"a.wav", "locked/b.wav", "locked/deep/c.wav", "z/d.wav"} {
		recording(t, filepath.Join(in, rel), 100)
	}
	mount(t, filepath.Join(out, "locked"), 1, syscall.MS_RDONLY)
	s, err := newPlan(t, in, out, 2).Run(context.Background(), &watcher{})
	mustDo(t, err)
	if s.Done != 2 || s.Failed() != 2 {
		t.Fatalf("%+v", s)
	}
	for _, err := range s.Failures {
		if !errors.Is(err, syscall.EROFS) || !strings.Contains(err.Error(), filepath.Join(out, "locked")) || !strings.Contains(err.Error(), "choose") {
			t.Errorf("failure %v, want one that tells of the folder and what to do", err)
		}
	}
	if got := fmt.Sprintf("%q", files(t, out)); got != `["a.wav" "locked" "z" "z/d.wav"]` {
		t.Errorf("the folder holds %s", got)
	}

	mount(t, filepath.Join(dir, "all"), 1, syscall.MS_RDONLY)
	p, err := New(parse(t, text), []string{in}, Options{Out: filepath.Join(dir, "all")})
	if err == nil {
		err = p.PrepareOut()
	}
	if !errors.Is(err, syscall.EROFS) && !strings.Contains(fmt.Sprint(err), "make room") {
		t.Errorf("an output folder that cannot be written to: %v", err)
	}
}
