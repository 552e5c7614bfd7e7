package batch

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"sync"
	"syscall"
	"testing"

	"fettle/audio"
	"fettle/audio/pcm"
	"fettle/filter"
)

const text = "stages:\n  - fir: {taps: [0.25, 0.5, 0.25]}\n"

// watcher counts what it is told and may act on it.
type watcher struct {
	mu       sync.Mutex
	bytes    int64
	finished []string
	act      func(finished int)
}

func (w *watcher) Bytes(n int64) {
	w.mu.Lock()
	defer w.mu.Unlock()
	w.bytes += n
}

func (w *watcher) Finished(j *Job, err error) {
	w.mu.Lock()
	defer w.mu.Unlock()
	w.finished = append(w.finished, j.Rel)
	if w.act != nil {
		w.act(len(w.finished))
	}
}

func mustDo(t *testing.T, errs ...error) {
	t.Helper()
	for _, err := range errs {
		if err != nil {
			t.Fatal(err)
		}
	}
}

// recording writes frames of silence in 16 bits.
func recording(t *testing.T, path string, frames int) {
	t.Helper()
	mustDo(t, os.MkdirAll(filepath.Dir(path), 0o777))
	w, err := audio.Create(path, audio.Spec{Rate: 8000, Channels: 1, Encoding: pcm.Encoding{Bytes: 2, Bits: 16}, Frames: int64(frames)})
	mustDo(t, err, w.WriteFrames(make([]float64, frames)), w.Commit())
}

func newPlan(t *testing.T, in, out string, jobs int) *Plan {
	t.Helper()
	chain, err := filter.Parse([]byte(text), "chain.yaml")
	mustDo(t, err)
	p, err := New(chain, []string{in}, Options{Out: out, Jobs: jobs})
	mustDo(t, err, p.PrepareOut())
	return p
}

// files lists everything below a folder but the record.
func files(t *testing.T, folder string) []string {
	t.Helper()
	var out []string
	mustDo(t, filepath.WalkDir(folder, func(path string, e os.DirEntry, err error) error {
		if rel, _ := filepath.Rel(folder, path); rel != "." && rel != RecordName {
			out = append(out, rel)
		}
		return err
	}))
	return out
}

// TestInterruptedMidway: what is finished is whole and recorded, of the rest
// there is no trace, and the next run does just that.
func TestInterruptedMidway(t *testing.T) {
	for _, jobs := range []int{1, 3} {
		in, out := filepath.Join(t.TempDir(), "in"), filepath.Join(t.TempDir(), "out")
		const count, frames = 40, 50_000
		for i := range count {
			recording(t, filepath.Join(in, fmt.Sprintf("%d/a.wav", i)), frames)
		}
		ctx, cancel := context.WithCancel(context.Background())
		p := newPlan(t, in, out, jobs)
		s, err := p.Run(ctx, &watcher{act: func(int) { cancel() }})
		if !errors.Is(err, context.Canceled) {
			t.Fatalf("error %v, want context.Canceled", err)
		}
		if s.Done < 1 || s.Done > p.workers() || s.Done+s.Left != count || s.Failed() != 0 {
			t.Errorf("%d jobs: %+v, want 1 to %d done and the rest left", jobs, s, p.workers())
		}
		past, err := readRecord(filepath.Join(out, RecordName))
		mustDo(t, err)
		var want []string
		for rel := range past {
			want = append(want, filepath.Dir(rel), rel)
			if info, err := os.Stat(filepath.Join(out, rel)); err != nil || info.Size() != 80+2*frames {
				t.Errorf("%s: %v, %v", rel, info, err)
			}
		}
		slices.Sort(want)
		if got := files(t, out); len(past) != s.Done || !slices.Equal(got, want) {
			t.Errorf("%d jobs: the folder holds %q, the record %q", jobs, got, want)
		}

		next := &watcher{}
		again, err := newPlan(t, in, out, jobs).Run(context.Background(), next)
		mustDo(t, err)
		if again.Skipped != s.Done || again.Done != count-s.Done || len(next.finished) != again.Done {
			t.Errorf("%d jobs: the next run %+v after %+v", jobs, again, s)
		}
	}
}

// TestInterruptedWithinARecording: of the one being treated nothing is left.
func TestInterruptedWithinARecording(t *testing.T) {
	in, out := filepath.Join(t.TempDir(), "in"), filepath.Join(t.TempDir(), "out")
	recording(t, filepath.Join(in, "deep/a.wav"), 10*block)
	ctx, cancel := context.WithCancel(context.Background())
	w := &byteWatcher{cancel: cancel}
	s, err := newPlan(t, in, out, 1).Run(ctx, w)
	if !errors.Is(err, context.Canceled) || s.Left != 1 || w.bytes == 0 || w.bytes >= 10*block*2 {
		t.Errorf("%v, %+v after %d bytes", err, s, w.bytes)
	}
	if got := files(t, out); len(got) != 0 {
		t.Errorf("left behind %q", got)
	}
}

// byteWatcher interrupts as soon as something was read.
type byteWatcher struct {
	watcher
	cancel func()
}

func (w *byteWatcher) Bytes(n int64) {
	w.watcher.Bytes(n)
	w.cancel()
}

// TestProgress: all bytes of the data and all recordings are told, once.
func TestProgress(t *testing.T) {
	in, out := filepath.Join(t.TempDir(), "in"), filepath.Join(t.TempDir(), "out")
	recording(t, filepath.Join(in, "a.wav"), 3*block+1)
	recording(t, filepath.Join(in, "b.wav"), 1)
	w := &watcher{}
	_, err := newPlan(t, in, out, 2).Run(context.Background(), w)
	mustDo(t, err)
	slices.Sort(w.finished)
	if w.bytes != 2*(3*block+2) || !slices.Equal(w.finished, []string{"a.wav", "b.wav"}) {
		t.Errorf("%d bytes, %q", w.bytes, w.finished)
	}
}

// TestFullDisk: a record that cannot be written stops the batch, since what is
// not recorded would be done again.
func TestFullDisk(t *testing.T) {
	in, out := filepath.Join(t.TempDir(), "in"), filepath.Join(t.TempDir(), "out")
	for i := range 10 * syncsAbreast {
		recording(t, filepath.Join(in, fmt.Sprintf("%d.wav", i)), 1)
	}
	full, err := os.OpenFile("/dev/full", os.O_WRONLY, 0)
	mustDo(t, err)
	defer full.Close()
	s, err := newPlan(t, in, out, 1).treatAll(context.Background(), &record{file: full}, &watcher{})
	if !errors.Is(err, syscall.ENOSPC) || !strings.Contains(err.Error(), "treatment record") {
		t.Errorf("error %v, want ENOSPC of the treatment record", err)
	}
	if s.Left == 0 {
		t.Errorf("%+v: the batch went on", s)
	}
}

// TestDropTorn keeps whole lines, however long the torn one is.
func TestDropTorn(t *testing.T) {
	long := strings.Repeat("x", 10_000)
	for _, test := range []struct{ text, want string }{
		{"", ""}, {"a", ""}, {"\n", "\n"}, {"a\n", "a\n"}, {"a\nb", "a\n"}, {"a\nb\n\x00", "a\nb\n"},
		{long, ""}, {long + "\n" + long, long + "\n"}, {"a\n" + strings.Repeat("x", 4096), "a\n"}, {"a\n" + strings.Repeat("x", 4095), "a\n"},
	} {
		path := filepath.Join(t.TempDir(), RecordName)
		mustDo(t, os.WriteFile(path, []byte(test.text), 0o666))
		rec, err := openRecord(path)
		mustDo(t, err, rec.close())
		raw, err := os.ReadFile(path)
		mustDo(t, err)
		if string(raw) != test.want {
			t.Errorf("%d bytes became %d, want %d", len(test.text), len(raw), len(test.want))
		}
	}
}

// TestRecordIsADevice that would be read without end.
func TestRecordIsADevice(t *testing.T) {
	path := filepath.Join(t.TempDir(), RecordName)
	mustDo(t, os.Symlink("/dev/zero", path))
	if _, err := readRecord(path); err == nil || !strings.Contains(err.Error(), "no regular file") {
		t.Errorf("error %v", err)
	}
}

// TestNames come back from a record whatever bytes they hold, and none is
// taken for another.
func TestNames(t *testing.T) {
	seen := map[string]name{}
	for _, n := range []name{"", "a.wav", "a\nb\t\"c\"\\.wav", "\xe9.wav", "\xe8.wav", `\xe9.wav`, "�.wav", "é\xc3.wav", "\xff\xfe", "e9", "<&>"} {
		raw, err := json.Marshal(n)
		mustDo(t, err)
		var back name
		mustDo(t, json.Unmarshal(raw, &back))
		if back != n {
			t.Errorf("%q came back as %q from %s", n, back, raw)
		}
		if other, ok := seen[string(raw)]; ok {
			t.Errorf("%q and %q are both %s", n, other, raw)
		}
		seen[string(raw)] = n
	}
	if raw, err := name("a/\xe9.wav").MarshalJSON(); err != nil || strings.TrimSpace(string(raw)) != `"a/\u0000e9.wav"` {
		t.Errorf("%s, %v", raw, err)
	}
	for _, bad := range []string{`"\u0000"`, `"\u00004"`, `"\u0000xy"`, `"\u000000"`, `1`} {
		if err := json.Unmarshal([]byte(bad), new(name)); err == nil {
			t.Errorf("%s is taken for a name", bad)
		}
	}
}

// TestOneRunAtATime: two would sweep each other's files away.
func TestOneRunAtATime(t *testing.T) {
	in, out := filepath.Join(t.TempDir(), "in"), filepath.Join(t.TempDir(), "out")
	recording(t, filepath.Join(in, "a.wav"), 10)
	first := newPlan(t, in, out, 1)
	rec, err := openRecord(first.recordPath())
	mustDo(t, err)
	if _, err := newPlan(t, in, out, 1).Run(context.Background(), &watcher{}); err == nil || !strings.Contains(err.Error(), "another run") {
		t.Errorf("a second run: %v", err)
	}
	mustDo(t, rec.close())
	_, err = first.Run(context.Background(), &watcher{})
	mustDo(t, err)
}
