package audio

import (
	"bytes"
	"errors"
	"io"
	"io/fs"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"syscall"
	"testing"

	"fettle/audio/container"
	"fettle/audio/needs"
	"fettle/audio/pcm"
)

func mustCreate(t *testing.T, path string, spec Spec) *Writer {
	t.Helper()
	w, err := Create(path, spec)
	if err != nil {
		t.Fatal(err)
	}
	return w
}

// TestWritesAndReads: every encoding, odd and even data lengths, any split: the
// samples come back, the file is whole, and its hash is right.
func TestWritesAndReads(t *testing.T) {
	for _, name := range []string{"pcm8", "pcm16", "pcm24", "pcm32", "float32", "float64"} {
		e, err := pcm.ParseEncoding(name)
		if err != nil {
			t.Fatal(err)
		}
		for _, frames := range []int{1, 101, 102, long} {
			x := fixtureSamples(frames, min(e.Bits, 24))
			spec := Spec{Rate: 44100, Channels: 1, Encoding: e, Frames: int64(frames)}
			var first []byte
			for _, step := range []int{frames, 1001, 64} {
				path := filepath.Join(t.TempDir(), "a.wav")
				w := mustCreate(t, path, spec)
				for at := 0; at < frames; at += step {
					if err := w.WriteFrames(x[at:min(frames, at+step)]); err != nil {
						t.Fatal(err)
					}
				}
				if err := w.Commit(); err != nil {
					t.Fatal(err)
				}
				if w.SHA256() != fileHash(t, path) {
					t.Errorf("%s, %d frames: hash %s", name, frames, w.SHA256())
				}
				r := mustOpen(t, path)
				mustEqual(t, readAll(t, r, 1000), x)
				if len(r.Warnings()) != 0 || r.Size()%2 != 0 {
					t.Errorf("%s, %d frames: %d bytes, warnings %q", name, frames, r.Size(), r.Warnings())
				}
				b, err := os.ReadFile(path)
				if err != nil {
					t.Fatal(err)
				}
				if first == nil {
					first = b
				}
				if !bytes.Equal(first, b) {
					t.Errorf("%s, %d frames in steps of %d: other bytes", name, frames, step)
				}
			}
		}
	}
}

// TestOddDataKeepsWhatFollows is the case of 101 mono frames of 24 bits, 303
// bytes: the pad byte stands where the next chunk is looked for.
func TestOddDataKeepsWhatFollows(t *testing.T) {
	path := filepath.Join(t.TempDir(), "a.wav")
	writeAll(t, path, Spec{Rate: 48000, Channels: 1, Encoding: pcm.Encoding{Bytes: 3, Bits: 24}, Frames: 101}, fixtureSamples(101, 24))
	appendBytes(t, path, []byte("LIST\x04\x00\x00\x00abcd"))
	r := mustOpen(t, path)
	last := r.Layout().Chunks[len(r.Layout().Chunks)-1]
	if last.ID != "LIST" || last.Size != 4 || r.Frames() != 101 {
		t.Errorf("last chunk %+v, %d frames", last, r.Frames())
	}
}

func TestDitherReachesTheFile(t *testing.T) {
	folder := t.TempDir()
	spec := pcm16(1, 1000)
	plain := writeAll(t, filepath.Join(folder, "plain.wav"), spec, make([]float64, 1000))
	spec.Dither = []*pcm.Dither{pcm.NewDither([32]byte{}, "a.wav", 0)}
	one := writeAll(t, filepath.Join(folder, "one.wav"), spec, make([]float64, 1000))
	spec.Dither = []*pcm.Dither{pcm.NewDither([32]byte{}, "a.wav", 0)}
	two := writeAll(t, filepath.Join(folder, "two.wav"), spec, make([]float64, 1000))
	if plain == one || one != two {
		t.Errorf("hashes %s, %s, %s: want the last two alike and the first not", plain, one, two)
	}
}

func TestOversAreRefused(t *testing.T) {
	folder := t.TempDir()
	path := filepath.Join(folder, "a.wav")
	w := mustCreate(t, path, pcm16(2, 4))
	for _, x := range [][]float64{{0, 0.5, 0.25, 1.2}, {-1.4, 0, 0, 0}} {
		if err := w.WriteFrames(x); err != nil {
			t.Fatal(err)
		}
	}
	err := w.Commit()
	var over *OverError
	if !errors.As(err, &over) {
		t.Fatalf("error %v, want an OverError", err)
	}
	need := 20 * math.Log10(1.4) // the positive peak 1.2 needs less
	if over.Path != path || over.Count != 2 || over.Frame != 1 || over.Channel != 1 ||
		!(math.Abs(over.HeadroomDB-need) <= 1e-12) || !(math.Abs(over.Peak-need) <= 1e-12) {
		t.Errorf("%+v, want 2 overs from frame 1, channel 1 on, %g dB", over, need)
	}
	// 2.92 dB, rounded up.
	mustFail(t, err, path, "2 samples", "frame 1, channel 2", "+2.92 dBFS", "3.0 dB of headroom", `--headroom "3.0 dB"`, "--headroom fit", "--format float32")
	mustBeEmpty(t, folder)
	if again := w.Commit(); !errors.As(again, &over) || w.SHA256() != "" {
		t.Errorf("committed again: %v, hash %q", again, w.SHA256())
	}
}

// TestNothingIsLeft: whatever goes wrong, the folder is as it was.
func TestNothingIsLeft(t *testing.T) {
	tests := []struct {
		name string
		do   func(w *Writer) error
		say  string
	}{
		{"too few frames", func(w *Writer) error {
			return errors.Join(w.WriteFrames(ramp(2*9)), w.Commit())
		}, "9 frames where 10 were announced"},
		{"no frames", (*Writer).Commit, "0 frames where 10"},
		{"too many frames", func(w *Writer) error {
			if err := w.WriteFrames(ramp(2 * 10)); err != nil {
				return err
			}
			if w.WriteFrames(ramp(2)) == nil || w.WriteFrames(nil) == nil {
				return errors.New("the eleventh frame was taken")
			}
			return w.Commit()
		}, "more than the 10 frames"},
		{"not a number", func(w *Writer) error {
			x := ramp(2 * 10)
			x[7] = math.NaN()
			if w.WriteFrames(x) == nil {
				return errors.New("NaN was taken")
			}
			return w.Commit()
		}, "frame 3, channel 2: the sample is NaN"},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			folder := t.TempDir()
			path := filepath.Join(folder, "a.wav")
			mustFail(t, test.do(mustCreate(t, path, pcm16(2, 10))), path, test.say)
			mustBeEmpty(t, folder)
		})
	}
}

// TestNoFrames: a file without audio can be written; [Open] has no use for it.
func TestNoFrames(t *testing.T) {
	path := filepath.Join(t.TempDir(), "a.wav")
	writeAll(t, path, pcm16(2, 0), nil)
	_, err := Open(path)
	mustFail(t, err, path, "byte 72: the file holds no audio")
}

func TestAbort(t *testing.T) {
	folder := t.TempDir()
	w := mustCreate(t, filepath.Join(folder, "a.wav"), pcm16(1, 10))
	if err := w.WriteFrames(ramp(5)); err != nil {
		t.Fatal(err)
	}
	for range 2 {
		if err := w.Abort(); err != nil {
			t.Fatal(err)
		}
	}
	mustBeEmpty(t, folder)
	if w.WriteFrames(ramp(5)) == nil || w.Commit() == nil {
		t.Error("an aborted writer goes on")
	}
	mustBeEmpty(t, folder)
}

func TestAfterCommit(t *testing.T) {
	path := filepath.Join(t.TempDir(), "a.wav")
	w := mustCreate(t, path, pcm16(1, 2))
	if err := errors.Join(w.WriteFrames(ramp(2)), w.Commit(), w.Abort()); err != nil {
		t.Fatal(err)
	}
	if w.WriteFrames(ramp(2)) == nil || w.Commit() == nil {
		t.Error("a committed writer goes on")
	}
	if mustOpen(t, path).Frames() != 2 {
		t.Error("the file has changed")
	}
}

// TestReplaces: until Commit what stood there is untouched; then it is
// replaced, and only it is in the folder.
func TestReplaces(t *testing.T) {
	folder := t.TempDir()
	path := filepath.Join(folder, "a.wav")
	old := writeAll(t, path, pcm16(1, 3), ramp(3))
	w := mustCreate(t, path, pcm16(1, 5))
	if err := w.WriteFrames(ramp(5)); err != nil {
		t.Fatal(err)
	}
	if fileHash(t, path) != old {
		t.Error("changed before Commit")
	}
	if err := w.Commit(); err != nil {
		t.Fatal(err)
	}
	entries, err := os.ReadDir(folder)
	if err != nil || len(entries) != 1 || mustOpen(t, path).Frames() != 5 {
		t.Errorf("%d entries, %v", len(entries), err)
	}
}

func TestMode(t *testing.T) {
	folder := t.TempDir()
	for name, mode := range map[string]fs.FileMode{"given.wav": 0o600, "default.wav": 0} {
		path := filepath.Join(folder, name)
		spec := pcm16(1, 1)
		spec.Mode = mode
		writeAll(t, path, spec, []float64{0})
		info, err := os.Stat(path)
		if err != nil {
			t.Fatal(err)
		}
		if mode == 0 {
			mode = defaultMode &^ umask()
		}
		if info.Mode().Perm() != mode {
			t.Errorf("%s: %v, want %v", name, info.Mode(), mode)
		}
	}
}

func umask() fs.FileMode {
	m := syscall.Umask(0)
	syscall.Umask(m)
	return fs.FileMode(m)
}

func TestCreateRefuses(t *testing.T) {
	folder := t.TempDir()
	file := filepath.Join(folder, "file")
	if err := os.WriteFile(file, nil, 0o644); err != nil {
		t.Fatal(err)
	}
	with := func(change func(*Spec)) Spec { s := pcm16(2, 1); change(&s); return s }
	tests := []struct {
		name string
		path string
		spec Spec
		say  string
	}{
		{"no such folder", filepath.Join(folder, "absent", "a.wav"), pcm16(2, 1), "no such file or directory; make the folder"},
		{"a file for a folder", filepath.Join(file, "a.wav"), pcm16(2, 1), "cannot be created in folder " + file},
		{"a folder for a file", folder, pcm16(2, 1), "is a folder"},
		{"read-only file system", "/proc/a.wav", pcm16(2, 1), "cannot be created in folder /proc"},
		{"no channels", file, with(func(s *Spec) { s.Channels = 0 }), "0 channels"},
		{"no rate", file, with(func(s *Spec) { s.Rate = 0 }), "0 Hz"},
		{"no length", file, with(func(s *Spec) { s.Frames = -1 }), "length must be known"},
		{"too long", file, with(func(s *Spec) { s.Frames = 1 << 61 }), "64-bit sizes"},
		{"dither", file, with(func(s *Spec) { s.Dither = make([]*pcm.Dither, 1) }), "dither for 1 channels does not fit 2"},
		{"fmt chunk", file, with(func(s *Spec) { s.FmtChunk = []byte{1, 0} }), "fmt chunk of 2 bytes"},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			w, err := Create(test.path, test.spec)
			if w != nil {
				t.Error("a writer was made")
			}
			mustFail(t, err, test.path, test.say)
		})
	}
	entries, err := os.ReadDir(folder)
	if err != nil || len(entries) != 1 {
		t.Errorf("%d entries are left, want 1: %v", len(entries), err)
	}
}

func TestChannelMaskSurvivesAFormatChange(t *testing.T) {
	path := filepath.Join(t.TempDir(), "a.wav")
	spec := float32s(6, 1)
	spec.ChannelMask = 0x3F
	writeAll(t, path, spec, make([]float64, 6))
	if f := mustOpen(t, path).Layout().Format; f.ChannelMask != 0x3F || !f.Float || f.Tag != container.TagExtensible {
		t.Errorf("format %+v", f)
	}
}

// TestFullDisk lets the writes go to a device that is always full.
func TestFullDisk(t *testing.T) {
	full, err := os.OpenFile("/dev/full", os.O_WRONLY, 0)
	if err != nil {
		needs.Missing(t, "this system has no device that is always full: %v", err)
	}
	defer full.Close()
	for name, frames := range map[string]int{"while writing": long, "at Commit": 10} {
		t.Run(name, func(t *testing.T) {
			folder := t.TempDir()
			path := filepath.Join(folder, "a.wav")
			w := mustCreate(t, path, pcm16(1, int64(frames)))
			w.out = full
			failed := w.WriteFrames(ramp(frames)) != nil
			if failed != (frames == long) {
				t.Errorf("WriteFrames failed: %t", failed)
			}
			err := w.Commit()
			if !errors.Is(err, syscall.ENOSPC) {
				t.Errorf("error %v, want %v", err, syscall.ENOSPC)
			}
			mustFail(t, err, path, "cannot be written: no space left on device; free space")
			mustBeEmpty(t, folder)
		})
	}
}

// TestCannotBePutInPlace: a folder has taken the name since.
func TestCannotBePutInPlace(t *testing.T) {
	folder := t.TempDir()
	path := filepath.Join(folder, "a.wav")
	w := mustCreate(t, path, pcm16(1, 1))
	if err := os.Mkdir(path, 0o755); err != nil {
		t.Fatal(err)
	}
	if err := w.WriteFrames([]float64{0}); err != nil {
		t.Fatal(err)
	}
	mustFail(t, w.Commit(), path, "cannot be put in place")
	entries, err := os.ReadDir(folder)
	if err != nil || len(entries) != 1 || strings.HasPrefix(entries[0].Name(), ".") {
		t.Errorf("left in the folder: %v, %v", entries, err)
	}
}

// TestProofFindsDamage: bytes that changed on their way to the disk keep the
// output from getting its name, and so does whatever the caller's proof finds.
func TestProofFindsDamage(t *testing.T) {
	for _, at := range []int64{0, 50, 100} {
		path := filepath.Join(t.TempDir(), "a.wav")
		var w *Writer
		spec := Spec{Rate: 8000, Channels: 1, Encoding: pcm.Encoding{Bytes: 2, Bits: 16}, Frames: 100, Proof: func(string) error { return nil }}
		w, err := Create(path, spec)
		if err != nil {
			t.Fatal(err)
		}
		if err := w.WriteFrames(make([]float64, 100)); err != nil {
			t.Fatal(err)
		}
		w.out = damaging{w.file, at}
		if err := w.Commit(); err == nil || !strings.Contains(err.Error(), "not what was written") {
			t.Errorf("byte %d damaged: %v", at, err)
		}
		if left, _ := os.ReadDir(filepath.Dir(path)); len(left) > 0 {
			t.Errorf("%d files are left", len(left))
		}
	}
}

// damaging changes a byte of each piece.
type damaging struct {
	io.Writer
	at int64
}

func (d damaging) Write(b []byte) (int, error) {
	c := slices.Clone(b)
	if d.at < int64(len(c)) {
		c[d.at]++
	}
	return d.Writer.Write(c)
}

func TestProofIsAsked(t *testing.T) {
	path := filepath.Join(t.TempDir(), "a.wav")
	asked := errors.New("asked")
	w, err := Create(path, Spec{Rate: 8000, Channels: 1, Encoding: pcm.Encoding{Bytes: 2, Bits: 16}, Frames: 1, Proof: func(p string) error {
		if _, err := Open(p); err != nil {
			t.Error(err)
		}
		return asked
	}})
	if err != nil {
		t.Fatal(err)
	}
	if err := errors.Join(w.WriteFrames([]float64{0}), w.Commit()); !errors.Is(err, asked) {
		t.Errorf("error %v", err)
	}
	if _, err := os.Stat(path); err == nil {
		t.Error("it is there all the same")
	}
}
