package audio

import (
	"math"
	"path/filepath"
	"testing"

	"fettle/audio/pcm"
)

// fixtureSamples are what testdata/make_fixtures.py writes: sample i has the
// code (i*2654435761 mod 2^32) - 2^31, cut to the upper `bits` bits.
func fixtureSamples(n, bits int) []float64 {
	x := make([]float64, n)
	for i := range x {
		code := int64(uint32(uint64(i)*2654435761)) - 1<<31
		x[i] = math.Ldexp(float64(code>>(32-bits)), 1-bits)
	}
	return x
}

// TestReadsOtherWriters reads files written by SciPy and libsndfile; see
// testdata/README.md.
func TestReadsOtherWriters(t *testing.T) {
	tests := []struct {
		file           string
		rate, channels int
		encoding       pcm.Encoding
		bits           int // of the codes
		mask           uint32
	}{
		{"scipy_8000Hz_1ch_pcm8.wav", 8000, 1, pcm.Encoding{Bytes: 1, Bits: 8}, 8, 0},
		{"scipy_44100Hz_2ch_pcm16.wav", 44100, 2, pcm.Encoding{Bytes: 2, Bits: 16}, 16, 0},
		{"scipy_96000Hz_1ch_pcm32.wav", 96000, 1, pcm.Encoding{Bytes: 4, Bits: 32}, 32, 0},
		{"scipy_48000Hz_3ch_float32.wav", 48000, 3, pcm.Encoding{Float: true, Bytes: 4, Bits: 32}, 24, 0},
		{"scipy_16000Hz_2ch_float64.wav", 16000, 2, pcm.Encoding{Float: true, Bytes: 8, Bits: 64}, 32, 0},
		{"sndfile_48000Hz_1ch_pcm24.wav", 48000, 1, pcm.Encoding{Bytes: 3, Bits: 24}, 24, 0},
		{"sndfile_192000Hz_6ch_pcm24_extensible.wav", 192000, 6, pcm.Encoding{Bytes: 3, Bits: 24}, 24, 0x3F},
		{"sndfile_22050Hz_2ch_pcm16_extensible.wav", 22050, 2, pcm.Encoding{Bytes: 2, Bits: 16}, 16, 3},
		{"sndfile_48000Hz_4ch_float32_extensible.wav", 48000, 4, pcm.Encoding{Float: true, Bytes: 4, Bits: 32}, 24, 0x33},
	}
	for _, test := range tests {
		t.Run(test.file, func(t *testing.T) {
			r := mustOpen(t, filepath.Join("testdata", test.file))
			if f := r.Format(); f.SampleRate != test.rate || f.NumChannels != test.channels || r.Encoding() != test.encoding || r.Frames() != 101 {
				t.Fatalf("%d Hz, %d channels, %v, %d frames", f.SampleRate, f.NumChannels, r.Encoding(), r.Frames())
			}
			if w := r.Warnings(); len(w) != 0 {
				t.Errorf("warnings %q", w)
			}
			if mask := r.Layout().Format.ChannelMask; mask != test.mask {
				t.Errorf("channel mask %X, want %X", mask, test.mask)
			}
			want := fixtureSamples(101*test.channels, test.bits)
			mustEqual(t, readAll(t, r, 7), want)

			// Written again with its own fmt chunk, the samples and it are the same.
			copied := filepath.Join(t.TempDir(), "copy.wav")
			writeAll(t, copied, Spec{Rate: test.rate, Channels: test.channels, Encoding: test.encoding, FmtChunk: r.Layout().Fmt, Frames: 101}, want)
			c := mustOpen(t, copied)
			mustEqual(t, readAll(t, c, 101), want)
			if c.Layout().Format != r.Layout().Format {
				t.Errorf("format %+v, was %+v", c.Layout().Format, r.Layout().Format)
			}
		})
	}
}
