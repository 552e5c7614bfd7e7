package audio

import (
	"encoding/binary"
	"fmt"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"testing"

	"fettle/audio/container"
	"fettle/audio/needs"
	"fettle/audio/pcm"
)

// python finds one with libsndfile's and SciPy's WAV readers; where continuous
// integration runs there must be one.
func python(t *testing.T) string {
	t.Helper()
	var missing string
	for _, name := range []string{"python3", "/usr/bin/python3"} { // Debian's packages are the second's
		out, err := exec.Command(name, "-c", "import soundfile, scipy.io.wavfile").CombinedOutput()
		if err == nil {
			return name
		}
		missing = fmt.Sprintf("%v, %s", err, out)
	}
	needs.Missing(t, "missing: Python 3 with soundfile and SciPy (Debian: python3-soundfile, python3-scipy): %s", missing)
	return ""
}

// interop runs testdata/interop.py.
func interop(t *testing.T, python, what, folder string) {
	t.Helper()
	out, err := exec.Command(python, "-B", filepath.Join("testdata", "interop.py"), what, folder).CombinedOutput()
	if err != nil {
		t.Fatalf("interop.py %s: %v\n%s", what, err, out)
	}
}

// interopEncodings are all that are written, those with unused bits too.
var interopEncodings = []pcm.Encoding{
	{Bytes: 1, Bits: 8}, {Bytes: 2, Bits: 16}, {Bytes: 3, Bits: 24}, {Bytes: 4, Bits: 32},
	{Bytes: 2, Bits: 12}, {Bytes: 3, Bits: 20}, {Bytes: 4, Bits: 24},
	{Float: true, Bytes: 4, Bits: 32}, {Float: true, Bytes: 8, Bits: 64},
}

// TestOthersReadOurs: libsndfile and SciPy find the very samples in what is
// written, be it RIFF or RF64, with chunks of odd size around the data or not.
func TestOthersReadOurs(t *testing.T) {
	python := python(t)
	folder := t.TempDir()
	// In RF64 libsndfile 1.2.0 does not reckon with the pad byte of a chunk before
	// the data, so there all are behind them.
	all, behind := carryArchive(t, archived), carryArchive(t, archived[3:])
	want := map[string]Spec{}
	for _, e := range interopEncodings {
		for _, channels := range []int{1, 2, 3, 6} {
			for _, s := range []Spec{{Frames: 1}, {Frames: 101, Carriage: all}, {Frames: 1, Limit: 1}, {Frames: 101, Limit: 1, Carriage: behind}} {
				s.Rate, s.Channels, s.Encoding = 44100, channels, e
				path := filepath.Join(folder, fmt.Sprintf("%v_%d_%d_%d.wav", e, channels, s.Frames, s.Limit))
				writeAll(t, path, s, fixtureSamples(int(s.Frames)*channels, min(e.Bits, 24)))
				want[path] = s
			}
		}
	}
	interop(t, python, "read", folder)
	for path, s := range want {
		samples := fixtureSamples(int(s.Frames)*s.Channels, min(s.Encoding.Bits, 24))
		checkDump(t, path+".sndfile", s, samples)
		if s.Limit == 0 {
			checkDump(t, path+".scipy", s, samples)
		}
	}
}

// carryArchive is the carriage of some of the chunks of writeArchive.
func carryArchive(t *testing.T, chunks []archivedChunk) *container.Carriage {
	t.Helper()
	r := mustOpen(t, writeArchive(t, filepath.Join(t.TempDir(), "archive.wav"), chunks))
	c, err := r.Carry(container.Change{Format: r.Layout().Format, Frames: r.Frames()})
	if err != nil {
		t.Fatal(err)
	}
	return c
}

// checkDump compares what interop.py has read.
func checkDump(t *testing.T, path string, s Spec, want []float64) {
	t.Helper()
	b, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	got := make([]float64, len(b)/8)
	for i := range got {
		got[i] = math.Float64frombits(binary.LittleEndian.Uint64(b[8*i:]))
	}
	if len(got) != 2+len(want) || got[0] != float64(s.Rate) || got[1] != float64(s.Channels) {
		t.Fatalf("%s: %d values, begins with %v", filepath.Base(path), len(got), got[:2])
	}
	for i, v := range want {
		if got[2+i] != v {
			t.Fatalf("%s: sample %d is %v, want %v", filepath.Base(path), i, got[2+i], v)
		}
	}
}

// foreignEncodings are the bits of the samples that interop.py writes, by what it
// calls the formats, and how they are stored.
var foreignEncodings = map[string]struct {
	bits int
	e    pcm.Encoding
}{
	"PCM_U8": {8, pcm.Encoding{Bytes: 1, Bits: 8}}, "uint8": {8, pcm.Encoding{Bytes: 1, Bits: 8}},
	"PCM_16": {16, pcm.Encoding{Bytes: 2, Bits: 16}}, "int16": {16, pcm.Encoding{Bytes: 2, Bits: 16}},
	"PCM_24": {24, pcm.Encoding{Bytes: 3, Bits: 24}},
	"PCM_32": {32, pcm.Encoding{Bytes: 4, Bits: 32}}, "int32": {32, pcm.Encoding{Bytes: 4, Bits: 32}},
	"FLOAT": {24, pcm.Encoding{Float: true, Bytes: 4, Bits: 32}}, "float32": {24, pcm.Encoding{Float: true, Bytes: 4, Bits: 32}},
	"DOUBLE": {32, pcm.Encoding{Float: true, Bytes: 8, Bits: 64}}, "float64": {32, pcm.Encoding{Float: true, Bytes: 8, Bits: 64}},
}

// TestReadsOthers: what libsndfile and SciPy write is read as what they were
// given, without a warning but for the byte order of RIFX; and written again with
// its chunks it still is.
func TestReadsOthers(t *testing.T) {
	python := python(t)
	folder := t.TempDir()
	interop(t, python, "write", folder)
	paths, err := filepath.Glob(filepath.Join(folder, "*.wav"))
	if err != nil || len(paths) != 4*6*8+5*8+1 {
		t.Fatalf("%d files, %v", len(paths), err)
	}
	forms := map[string]container.Form{"WAV": container.RIFF, "WAVEX": container.RIFF, "RF64": container.RF64, "RIFX": container.RIFX, "downgraded": container.RIFF}
	for _, path := range paths {
		name := strings.TrimSuffix(filepath.Base(path), ".wav")
		library, rest, _ := strings.Cut(name, "_")
		form, rest, _ := strings.Cut(rest, "_")
		parts := strings.Split(rest, "_")
		channels, frames := mustAtoi(t, parts[len(parts)-2]), mustAtoi(t, parts[len(parts)-1])
		kind := foreignEncodings[strings.Join(parts[:len(parts)-2], "_")]
		r := mustOpen(t, path)
		if r.Layout().Form != forms[form] || r.Encoding() != kind.e || r.Format().SampleRate != 44100 || r.Format().NumChannels != channels {
			t.Errorf("%s of %s: %s, %v, %+v", name, library, r.Layout().Form, r.Encoding(), r.Format())
		}
		if w := r.Warnings(); len(w) != 0 && (form != "RIFX" || len(w) != 1) {
			t.Errorf("%s: warnings %q", name, w)
		}
		samples := fixtureSamples(frames*channels, kind.bits)
		mustEqual(t, readAll(t, r, 7), samples)
		if sum, err := r.SHA256(); err != nil || sum != fileHash(t, path) {
			t.Errorf("%s: hash %s, %v", name, sum, err)
		}
		again := mustOpen(t, copyOf(t, r, folder))
		if again.Layout().Form != container.RIFF || len(again.Warnings()) != 0 || again.Layout().Format != r.Layout().Format {
			t.Errorf("%s again: %s, %+v, warnings %q", name, again.Layout().Form, again.Layout().Format, again.Warnings())
		}
		mustEqual(t, readAll(t, again, 101), samples)
		r.Close()
		again.Close()
	}
}

func mustAtoi(t *testing.T, s string) int {
	t.Helper()
	n, err := strconv.Atoi(s)
	if err != nil {
		t.Fatal(err)
	}
	return n
}

// copyOf writes a recording again, unchanged, with its fmt chunk and all others
// that are carried, as copy.wav.
func copyOf(t *testing.T, r *Recording, folder string) (path string) {
	t.Helper()
	carriage, err := r.Carry(container.Change{Format: r.Layout().Format, Frames: r.Frames()})
	if err != nil {
		t.Fatal(err)
	}
	if err := r.Rewind(); err != nil {
		t.Fatal(err)
	}
	path = filepath.Join(folder, "copy.wav")
	writeAll(t, path, Spec{Rate: r.Format().SampleRate, Channels: r.Format().NumChannels, Encoding: r.Encoding(),
		FmtChunk: r.Layout().Fmt, Frames: r.Frames(), Carriage: carriage}, readAll(t, r, 1000))
	return path
}
