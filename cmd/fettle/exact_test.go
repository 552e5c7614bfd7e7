package main

import (
	"bytes"
	"fmt"
	"os"
	"path/filepath"
	"testing"

	"fettle/audio"
	"fettle/audio/pcm"
	"fettle/filter"

	goaudio "github.com/go-audio/audio"
	gowav "github.com/go-audio/wav"
)

var formats = []string{"pcm8", "pcm16", "pcm24", "pcm32", "float32", "float64"}

// TestIdentity: a chain that does nothing gives back the file, byte for byte.
func TestIdentity(t *testing.T) {
	b := newBench(t)
	lengths := []int{1, 101, 20000} // the last is more than one block
	for _, format := range formats {
		for channels := 1; channels <= 3; channels++ {
			for _, frames := range lengths {
				b.recording(fmt.Sprintf("in/%s %d %d.wav", format, channels, frames), format, rate, channels, noise(frames*channels, uint32(frames)))
			}
		}
	}
	b.render(identityChain, b.path("in")).must(t, exitDone)
	entries := b.record()
	mustEqual(t, "recordings", len(entries), len(formats)*3*len(lengths))
	for _, entry := range entries {
		rel := entry["output"].(string)
		mustEqual(t, rel+": dither", entry["dither"], any("none"))
		if !bytes.Equal(b.output(rel), read(t, b.path("in/"+rel))) {
			t.Errorf("%s: not the original's bytes", rel)
		}
	}
}

// TestIdentityOfForeignFiles: as above for files that an independent writer
// (github.com/go-audio/wav) made, whose headers need not be kept.
func TestIdentityOfForeignFiles(t *testing.T) {
	b := newBench(t)
	for _, bits := range []int{8, 16, 24, 32} {
		for channels := 1; channels <= 3; channels++ {
			path := b.file(fmt.Sprintf("in/%d %d.wav", bits, channels), nil)
			encodeForeign(t, path, bits, channels)
		}
	}
	b.render(identityChain, b.path("in")).must(t, exitDone)
	for _, entry := range b.record() {
		rel := entry["output"].(string)
		in, out := data(t, b.path("in/"+rel)), data(t, filepath.Join(b.Out, rel))
		if len(in) == 0 || !bytes.Equal(in, out) {
			t.Errorf("%s: %d bytes of data became %d others", rel, len(in), len(out))
		}
	}
}

func encodeForeign(t *testing.T, path string, bits, channels int) {
	t.Helper()
	f, err := os.Create(path)
	mustDo(t, err)
	buf := &goaudio.IntBuffer{Format: &goaudio.Format{SampleRate: rate, NumChannels: channels}, SourceBitDepth: bits}
	for i := range 101 * channels {
		buf.Data = append(buf.Data, (i*7919)%(1<<(bits-1)))
	}
	e := gowav.NewEncoder(f, rate, bits, channels, tagPCM)
	mustDo(t, e.Write(buf), e.Close(), f.Close())
}

// data is the bytes of a file's data chunk.
func data(t *testing.T, path string) []byte {
	t.Helper()
	r, err := audio.Open(path)
	mustDo(t, err)
	defer r.Close()
	at := r.Layout().Data
	return read(t, path)[at.Offset : at.Offset+at.Size]
}

// TestDither: told of in the record exactly where samples are requantised.
func TestDither(t *testing.T) {
	tests := []struct {
		chain, from, to, want string
	}{
		{filterChain, "pcm16", "", "TPDF"},
		{filterChain, "pcm16", "pcm24", "TPDF"},
		{filterChain, "pcm16", "float32", "none"},
		{filterChain, "float32", "", "none"},
		{identityChain, "pcm8", "pcm16", "none"},
		{identityChain, "pcm24", "pcm16", "TPDF"},
		{identityChain, "float32", "pcm32", "TPDF"},
		{"stages:\n  - delay: {by: 3 samples}\n", "pcm16", "", "none"},
		{"stages:\n  - gain: {by: -1 dB, channels: [2]}\n", "pcm16", "", "TPDF"},
	}
	for _, test := range tests {
		b := newBench(t)
		args := []string{b.recording("a.wav", test.from, rate, 2, noise(200, 1))}
		if test.to != "" {
			args = append(args, "--format", test.to)
		}
		b.render(test.chain, args...).must(t, exitDone)
		mustEqual(t, fmt.Sprintf("%q from %s to %q", test.chain, test.from, test.to), b.last()["dither"], any(test.want))
	}
}

// TestSameBytes: whatever the number of jobs, and every time.
func TestSameBytes(t *testing.T) {
	b := newBench(t)
	for i := range 7 {
		b.recording(fmt.Sprintf("in/%d.wav", i), "pcm16", rate, 2, noise(2*(9000+i), uint32(i)))
	}
	first := map[string][]byte{}
	for i, jobs := range []string{"1", "4", "1"} {
		b.Out = b.path(fmt.Sprintf("out%d", i))
		b.render(filterChain, "--jobs", jobs, b.path("in")).must(t, exitDone)
		for _, entry := range b.record() {
			rel := entry["output"].(string)
			mustEqual(t, rel+": dither", entry["dither"], any("TPDF"))
			if i == 0 {
				first[rel] = b.output(rel)
			} else if !bytes.Equal(first[rel], b.output(rel)) {
				t.Errorf("%s: other bytes with --jobs %s", rel, jobs)
			}
		}
	}
	mustEqual(t, "outputs", len(first), 7)
	if bytes.Equal(first["0.wav"][44:200], first["1.wav"][44:200]) {
		t.Error("two recordings have the same samples: the check above says nothing")
	}
}

// convolve is the plain definition of aligned convolution with a symmetric
// kernel, channel by channel.
func convolve(x, taps []float64, channels int) []float64 {
	out := make([]float64, len(x))
	for i := range out {
		for k, h := range taps {
			if at := i + channels*(len(taps)/2-k); at >= 0 && at < len(x) {
				out[i] += h * x[at]
			}
		}
	}
	return out
}

// kernels of odd length, symmetric, with a passing gain below 1.
var kernels = []struct {
	text string
	taps []float64
}{
	{"[0.25, 0.5, 0.25]", []float64{0.25, 0.5, 0.25}},
	{"[-0.1, 0.2, 0.7, 0.2, -0.1]", []float64{-0.1, 0.2, 0.7, 0.2, -0.1}},
	{"[0.9]", []float64{0.9}},
}

// TestRenderIsConvolution: to 1e-12 in 64-bit float; sums of five products of
// numbers below 1 err by some 1e-16, a transform of a short block by ten times
// that.
func TestRenderIsConvolution(t *testing.T) {
	for _, k := range kernels {
		for _, frames := range []int{1, 2, 333, 20001} {
			b := newBench(t)
			x := noise(2*frames, 5)
			b.render("stages:\n  - fir: {taps: "+k.text+"}\n", b.recording("a.wav", "float64", rate, 2, x)).must(t, exitDone)
			got, want := samples(t, filepath.Join(b.Out, "a.wav")), convolve(x, k.taps, 2)
			mustEqual(t, "samples", len(got), len(want))
			for i := range want {
				if !(abs(got[i]-want[i]) <= 1e-12) {
					t.Fatalf("%s, %d frames: sample %d is %g, want %g", k.text, frames, i, got[i], want[i])
				}
			}
		}
	}
}

func abs(x float64) float64 { return max(x, -x) }

func samples(t *testing.T, path string) []float64 {
	t.Helper()
	r, err := audio.Open(path)
	mustDo(t, err)
	defer r.Close()
	out := make([]float64, int(r.Frames())*r.Format().NumChannels)
	for at := 0; at < len(out); {
		n, err := r.ReadFrames(out[at:])
		mustDo(t, err)
		at += n * r.Format().NumChannels
	}
	return out
}

// TestRenderQuantises: the codes in the file are those of the quantiser, fed
// by plain convolution and seeded by chain, path and channel.
func TestRenderQuantises(t *testing.T) {
	b := newBench(t)
	const text = "stages:\n  - fir: {taps: [0.25, 0.5, 0.25]}\n"
	x := noise(2*5001, 9)
	b.recording("in/deep/a.wav", "pcm24", rate, 2, x)
	b.render(text, b.path("in")).must(t, exitDone)

	chain, err := filter.Load(b.path("chain.yaml"))
	mustDo(t, err)
	e, err := pcm.ParseEncoding("pcm24")
	mustDo(t, err)
	q, err := pcm.NewQuantiser(e, 2, []*pcm.Dither{
		pcm.NewDither(chain.SHA256, "deep/a.wav", 0), pcm.NewDither(chain.SHA256, "deep/a.wav", 1),
	})
	mustDo(t, err)
	want := make([]byte, 3*len(x))
	mustDo(t, q.Encode(want, convolve(x, []float64{0.25, 0.5, 0.25}, 2)))
	if got := data(t, filepath.Join(b.Out, "deep/a.wav")); !bytes.Equal(got, want) {
		t.Error("other codes than the quantiser's")
	}
}
