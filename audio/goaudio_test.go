package audio

import (
	"bytes"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"

	"fettle/audio/pcm"

	goaudio "github.com/go-audio/audio"
	"github.com/go-audio/wav"
)

// integerCases are the formats that go-audio/wav reads and writes.
var integerCases = []struct {
	bits, channels int
}{{8, 1}, {8, 2}, {16, 1}, {16, 2}, {24, 1}, {24, 2}, {32, 2}, {8, 3}, {16, 3}, {24, 3}, {24, 6}}

// TestGoAudioReadsOurs: an independent reader finds the codes that were written.
func TestGoAudioReadsOurs(t *testing.T) {
	for _, c := range integerCases {
		t.Run(fmt.Sprintf("%d bits, %d channels", c.bits, c.channels), func(t *testing.T) {
			path := filepath.Join(t.TempDir(), "a.wav")
			samples := fixtureSamples(101*c.channels, c.bits)
			writeAll(t, path, Spec{Rate: 44100, Channels: c.channels, Encoding: pcm.Encoding{Bytes: c.bits / 8, Bits: c.bits}, Frames: 101}, samples)
			d, got := decodeWithGoAudio(t, path, mustOpen(t, path))
			if int(d.SampleRate) != 44100 || int(d.NumChans) != c.channels || int(d.BitDepth) != c.bits {
				t.Errorf("%d Hz, %d channels, %d bits", d.SampleRate, d.NumChans, d.BitDepth)
			}
			mustEqual(t, got, samples)
		})
	}
}

// TestReadsGoAudio reads what its encoder writes.
func TestReadsGoAudio(t *testing.T) {
	for _, c := range integerCases {
		t.Run(fmt.Sprintf("%d bits, %d channels", c.bits, c.channels), func(t *testing.T) {
			path := filepath.Join(t.TempDir(), "a.wav")
			samples := fixtureSamples(101*c.channels, c.bits)
			encodeWithGoAudio(t, path, samples, c.bits, c.channels)
			r := mustOpen(t, path)
			if r.Encoding() != (pcm.Encoding{Bytes: c.bits / 8, Bits: c.bits}) || r.Format().NumChannels != c.channels || r.Format().SampleRate != 48000 {
				t.Errorf("%v, %+v", r.Encoding(), r.Format())
			}
			mustEqual(t, readAll(t, r, 10), samples)
		})
	}
}

func encodeWithGoAudio(t *testing.T, path string, samples []float64, bits, channels int) {
	t.Helper()
	f, err := os.Create(path)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	e := wav.NewEncoder(f, 48000, bits, channels, 1)
	format := &goaudio.Format{SampleRate: 48000, NumChannels: channels}
	if err := e.Write(&goaudio.IntBuffer{Format: format, Data: samplesToCodes(samples, bits), SourceBitDepth: bits}); err != nil {
		t.Fatal(err)
	}
	if err := e.Close(); err != nil {
		t.Fatal(err)
	}
}

// unsignedOffset: the library hands 8-bit codes through as stored, unsigned.
func unsignedOffset(bits int) int {
	if bits == 8 {
		return 128
	}
	return 0
}

func codesToSamples(codes []int, bits int) []float64 {
	x := make([]float64, len(codes))
	for i, c := range codes {
		x[i] = float64(c-unsignedOffset(bits)) / float64(int64(1)<<(bits-1))
	}
	return x
}

func samplesToCodes(x []float64, bits int) []int {
	codes := make([]int, len(x))
	for i, v := range x {
		codes[i] = int(v*float64(int64(1)<<(bits-1))) + unsignedOffset(bits)
	}
	return codes
}

// TestGoAudioFixtures reads the recordings that come with go-audio/wav, written
// by many programs, as that library reads them; and so it does what is written of
// them with their chunks.
func TestGoAudioFixtures(t *testing.T) {
	out, err := exec.Command("go", "list", "-m", "-f", "{{.Dir}}", "github.com/go-audio/wav").Output()
	if err != nil {
		t.Fatalf("go list: %v", err)
	}
	paths, err := filepath.Glob(filepath.Join(strings.TrimSpace(string(out)), "fixtures", "*.wav"))
	if err != nil || len(paths) < 12 {
		t.Fatalf("%d fixtures, %v", len(paths), err)
	}
	for _, path := range paths {
		t.Run(filepath.Base(path), func(t *testing.T) {
			r := mustOpen(t, path)
			_, want := decodeWithGoAudio(t, path, r)
			mustEqual(t, readAll(t, r, 1000), want)
			copied := copyOf(t, r, t.TempDir())
			c := mustOpen(t, copied)
			_, got := decodeWithGoAudio(t, copied, c)
			mustEqual(t, got, want)
			if c.Layout().Format != r.Layout().Format || len(c.Warnings()) != 0 {
				t.Errorf("format %+v, warnings %q", c.Layout().Format, c.Warnings())
			}
			mustEqual(t, readAll(t, c, 1000), want)
		})
	}
}

// decodeWithGoAudio reads a whole file of whole bytes a sample, which is open as
// r too. What stands behind the last whole frame, in one file within the data
// chunk, that library takes for one more sample: a pad byte.
func decodeWithGoAudio(t *testing.T, path string, r *Recording) (*wav.Decoder, []float64) {
	t.Helper()
	b, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	d := wav.NewDecoder(bytes.NewReader(b)) // which reads sample by sample
	buffer, err := d.FullPCMBuffer()
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range r.Layout().Chunks {
		if c.ID == "data" && c.Size+c.Size%2 > r.Layout().Data.Size {
			buffer.Data = buffer.Data[:len(buffer.Data)-1]
		}
	}
	return d, codesToSamples(buffer.Data, int(d.BitDepth))
}
