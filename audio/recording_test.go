package audio

import (
	"encoding/binary"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"fettle/audio/container"
	"fettle/audio/pcm"
)

// long is enough for several buffers of every encoding.
const long = 3*bufferBytes/2 + 17

func TestReadsInAnyStep(t *testing.T) {
	path := filepath.Join(t.TempDir(), "a.wav")
	x := ramp(3 * long)
	spec := float32s(3, long)
	spec.Encoding = pcm.Encoding{Float: true, Bytes: 8, Bits: 64}
	writeAll(t, path, spec, x)
	for _, step := range []int{1, 1000, bufferBytes / 24, bufferBytes/24 + 1, long - 1, long, long + 1} {
		mustEqual(t, readAll(t, mustOpen(t, path), step), x)
	}
}

func TestWidestFrame(t *testing.T) {
	path := filepath.Join(t.TempDir(), "a.wav")
	const channels = 65535
	spec := Spec{Rate: 1, Channels: channels, Encoding: pcm.Encoding{Bytes: 1, Bits: 8}, Frames: 3}
	x := fixtureSamples(3*channels, 8)
	writeAll(t, path, spec, x)
	r := mustOpen(t, path)
	mustEqual(t, readAll(t, r, 2), x)
	if w := r.Warnings(); len(w) != 1 || !strings.Contains(w[0], "the sample rate is 1 Hz") {
		t.Errorf("warnings %q, want one for the rate", w)
	}
}

func TestRateWarning(t *testing.T) {
	for rate, warned := range map[int]bool{7999: true, 8000: false, 384000: false, 384001: true, math.MaxUint32: true} {
		path := filepath.Join(t.TempDir(), "a.wav")
		spec := pcm16(1, 1)
		spec.Rate = rate
		writeAll(t, path, spec, []float64{0})
		if got := len(mustOpen(t, path).Warnings()) != 0; got != warned {
			t.Errorf("%d Hz: warned %t, want %t", rate, got, warned)
		}
	}
}

func TestRewind(t *testing.T) {
	path := filepath.Join(t.TempDir(), "a.wav")
	x := fixtureSamples(2*long, 16)
	writeAll(t, path, pcm16(2, long), x)
	r := mustOpen(t, path)
	for range 3 {
		if _, err := r.ReadFrames(make([]float64, 2*1000)); err != nil {
			t.Fatal(err)
		}
		if err := r.Rewind(); err != nil {
			t.Fatal(err)
		}
	}
	mustEqual(t, readAll(t, r, 999), x)
	if sum, err := r.SHA256(); err != nil || sum != fileHash(t, path) {
		t.Errorf("hash %s after interrupted passes, %v", sum, err)
	}
}

// TestHash: the same hash whenever it is asked for, with chunks on both sides of
// the data, and asking does not disturb the stream.
func TestHash(t *testing.T) {
	path := filepath.Join(t.TempDir(), "a.wav")
	x := fixtureSamples(long, 16)
	writeAll(t, path, pcm16(1, long), x)
	appendBytes(t, path, []byte("LIST\x04\x00\x00\x00abcd"))
	want := fileHash(t, path)
	for name, before := range map[string]int{"before": 0, "in the middle": 40000, "after": long} {
		r := mustOpen(t, path)
		var got []float64
		if before > 0 {
			got = make([]float64, before)
			if n, err := r.ReadFrames(got); n != before || err != nil {
				t.Fatal(n, err)
			}
		}
		if end := r.Layout().Data.Offset + 2*int64(before); before > 0 && r.hashed < end {
			t.Errorf("%s: %d bytes are hashed, of %d that streamed by", name, r.hashed, end)
		}
		for range 2 {
			if sum, err := r.SHA256(); err != nil || sum != want {
				t.Errorf("%s: %s, %v; want %s", name, sum, err, want)
			}
		}
		mustEqual(t, append(got, readAll(t, r, 4096)...), x)
		if sum, err := r.SHA256(); err != nil || sum != want {
			t.Errorf("%s, then read on: %s, %v", name, sum, err)
		}
	}
}

func appendBytes(t *testing.T, path string, b []byte) {
	t.Helper()
	f, err := os.OpenFile(path, os.O_APPEND|os.O_WRONLY, 0)
	if err != nil {
		t.Fatal(err)
	}
	if _, err := f.Write(b); err != nil {
		t.Fatal(err)
	}
	if err := f.Close(); err != nil {
		t.Fatal(err)
	}
}

func TestFacts(t *testing.T) {
	path := filepath.Join(t.TempDir(), "a.wav")
	writeAll(t, path, pcm16(1, 50), ramp(50))
	info, err := os.Stat(path)
	if err != nil {
		t.Fatal(err)
	}
	r := mustOpen(t, path)
	if r.Size() != info.Size() || r.Size() != 80+100 || !r.ModTime().Equal(info.ModTime()) {
		t.Errorf("size %d, changed %v; want %d, %v", r.Size(), r.ModTime(), info.Size(), info.ModTime())
	}
	if r.Layout().Data != (container.Extent{Offset: 80, Size: 100}) {
		t.Errorf("data at %+v", r.Layout().Data)
	}
}

func TestOpenRefuses(t *testing.T) {
	folder := t.TempDir()
	put := func(name, content string) string {
		path := filepath.Join(folder, name)
		if err := os.WriteFile(path, []byte(content), 0o644); err != nil {
			t.Fatal(err)
		}
		return path
	}
	tests := []struct {
		path string
		is   error
		say  string
	}{
		{filepath.Join(folder, "absent.wav"), fs.ErrNotExist, "cannot be opened: no such file or directory; check the name"},
		{folder, nil, "is a folder"},
		{put("empty.wav", ""), container.ErrMalformed, "byte 0: the file is empty"},
		{put("text.wav", "once upon a time"), container.ErrMalformed, "byte 0: not a WAV file"},
		{put("short.wav", "RIFF\x24\x00\x00\x00WAVEfmt "), container.ErrMalformed, "byte 12: the file ends inside a chunk header"},
		{put("companded.wav", "RIFF\x26\x00\x00\x00WAVEfmt \x10\x00\x00\x00\x06\x00\x01\x00\x40\x1F\x00\x00\x40\x1F\x00\x00\x01\x00\x08\x00data\x02\x00\x00\x00\xD5\xD5"),
			container.ErrUnsupported, "byte 20: the samples are coded as A-law"},
	}
	for _, test := range tests {
		r, err := Open(test.path)
		if r != nil {
			t.Errorf("%s was opened", test.path)
		}
		mustFail(t, err, test.path, test.say)
		if test.is != nil && !errors.Is(err, test.is) {
			t.Errorf("%v is no %v", err, test.is)
		}
	}
	_, err := Open(os.DevNull)
	mustFail(t, err, os.DevNull, "is not a regular file")
}

// TestNonFiniteSamples: the error names where it is, and ends the stream until
// it is rewound.
func TestNonFiniteSamples(t *testing.T) {
	for value, name := range map[uint32]string{0x7FC00000: "NaN", 0x7F800000: "+Inf", 0xFF800000: "-Inf"} {
		path := filepath.Join(t.TempDir(), "a.wav")
		writeAll(t, path, float32s(2, 100), ramp(200))
		b, err := os.ReadFile(path)
		if err != nil {
			t.Fatal(err)
		}
		binary.LittleEndian.PutUint32(b[len(b)-800+4*(2*30+1):], value)
		if err := os.WriteFile(path, b, 0o644); err != nil {
			t.Fatal(err)
		}
		r := mustOpen(t, path)
		x := make([]float64, 2*20)
		if n, err := r.ReadFrames(x); n != 20 || err != nil {
			t.Fatal(n, err)
		}
		for range 2 {
			n, err := r.ReadFrames(x)
			if n != 0 {
				t.Errorf("%d frames with an error", n)
			}
			mustFail(t, err, path, "frame 30, channel 2: the sample is "+name)
		}
		if err := r.Rewind(); err != nil {
			t.Fatal(err)
		}
		if n, err := r.ReadFrames(x); n != 20 || err != nil {
			t.Errorf("after rewinding: %d frames, %v", n, err)
		}
	}
}

func TestShrinkingFile(t *testing.T) {
	path := filepath.Join(t.TempDir(), "a.wav")
	writeAll(t, path, pcm16(1, long), ramp(long))
	r := mustOpen(t, path)
	const left = bufferBytes + 1001
	if err := os.Truncate(path, left); err != nil {
		t.Fatal(err)
	}
	x := make([]float64, long)
	n, err := r.ReadFrames(x)
	if n != 0 || !errors.Is(err, io.ErrUnexpectedEOF) {
		t.Errorf("%d frames, %v", n, err)
	}
	mustFail(t, err, path, fmt.Sprintf("byte %d: the file ends here", left))
	_, err = r.SHA256()
	mustFail(t, err, path, fmt.Sprintf("byte %d: the file ends here", left))
}

func TestClosedRecording(t *testing.T) {
	path := filepath.Join(t.TempDir(), "a.wav")
	writeAll(t, path, pcm16(1, 10), ramp(10))
	r := mustOpen(t, path)
	if err := r.Close(); err != nil {
		t.Fatal(err)
	}
	_, err := r.ReadFrames(make([]float64, 4))
	if !errors.Is(err, os.ErrClosed) {
		t.Errorf("reading a closed recording: %v", err)
	}
}

// TestReadingAllocatesNothing once the first call has been made.
func TestReadingAllocatesNothing(t *testing.T) {
	path := filepath.Join(t.TempDir(), "a.wav")
	writeAll(t, path, pcm16(1, long), ramp(long))
	r := mustOpen(t, path)
	x := make([]float64, 100)
	if n := testing.AllocsPerRun(900, func() {
		if _, err := r.ReadFrames(x); err != nil {
			t.Fatal(err)
		}
	}); n != 0 {
		t.Errorf("%g allocations a call", n)
	}
}
