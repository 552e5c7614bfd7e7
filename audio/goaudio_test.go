package audio

import (
	"fmt"
	"os"
	"path/filepath"
	"testing"

	"fettle/audio/pcm"

	goaudio "github.com/go-audio/audio"
	"github.com/go-audio/wav"
)

// integerCases are the formats that go-audio/wav reads and writes.
var integerCases = []struct {
	bits, channels int
}{{8, 1}, {8, 2}, {16, 1}, {16, 2}, {24, 1}, {24, 2}, {32, 2}}

// TestGoAudioReadsOurs: an independent reader finds the codes that were written.
func TestGoAudioReadsOurs(t *testing.T) {
	for _, c := range integerCases {
		t.Run(fmt.Sprintf("%d bits, %d channels", c.bits, c.channels), func(t *testing.T) {
			path := filepath.Join(t.TempDir(), "a.wav")
			samples := fixtureSamples(101*c.channels, c.bits)
			writeAll(t, path, Spec{Rate: 44100, Channels: c.channels, Encoding: pcm.Encoding{Bytes: c.bits / 8, Bits: c.bits}, Frames: 101}, samples)
			f, err := os.Open(path)
			if err != nil {
				t.Fatal(err)
			}
			defer f.Close()
			d := wav.NewDecoder(f)
			buffer, err := d.FullPCMBuffer()
			if err != nil {
				t.Fatal(err)
			}
			if int(d.SampleRate) != 44100 || int(d.NumChans) != c.channels || int(d.BitDepth) != c.bits {
				t.Errorf("%d Hz, %d channels, %d bits", d.SampleRate, d.NumChans, d.BitDepth)
			}
			// It takes the pad byte after odd data for one more sample.
			if extra := len(buffer.Data) - len(samples); extra != 101*c.channels*c.bits/8%2 {
				t.Fatalf("%d samples more than were written", extra)
			}
			mustEqual(t, codesToSamples(buffer.Data[:len(samples)], c.bits), samples)
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
