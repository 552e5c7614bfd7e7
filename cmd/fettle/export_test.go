package main

import (
	"os"
	"strings"
	"testing"

	"fettle/audio"
)

// TestExport: the forms go to standard output or to a file, and a form that
// cannot hold the chain says which can.
func TestExport(t *testing.T) {
	b := newBench(t)
	chain := b.chain("stages:\n  - bell: {at: 1 kHz, gain: 6 dB, q: 1}\n")
	rows := fettle("export", chain, "--rate", "48k", "--as", "biquads")
	rows.must(t, exitDone)
	// The cookbook's peaking section at 48 kHz, 1 kHz, 6 dB, Q 1 (W3C Note 2021;
	// coefficients recomputed from its formulas): b0 1.043953086990, a1 -1.895320723937.
	for _, words := range []string{"b0 b1 b2 a0 a1 a2", "\n1.0439530869", " 1 -1.8953207239"} {
		if !strings.Contains(rows.stdout, words) {
			t.Errorf("no %q in %q", words, rows.stdout)
		}
	}
	file := b.path("rows.txt")
	fettle("export", chain, "--as", "biquads", "--out", file).must(t, exitDone)
	mustEqual(t, "the file", string(read(t, file)), rows.stdout)
	fettle("export", chain, "--as", "biquads", "--out", file).must(t, exitNotStarted, "rows.txt", "is there already")
	fettle("export", chain, "--as", "taps").must(t, exitNotStarted, "cannot be written as taps", "biquads")
	fettle("export", chain, "--as", "tapes").must(t, exitNotStarted, "tapes", "taps, biquads, json, wav")
	fettle("export", chain, "--channel", "-1").must(t, exitNotStarted, "--channel")
}

// TestExportOfChannels: where channels are treated apart, one has to be named.
func TestExportOfChannels(t *testing.T) {
	b := newBench(t)
	chain := b.chain("stages:\n  - fir: {taps: [0.5, 0.5], channels: [2]}\n")
	fettle("export", chain, "--as", "taps").must(t, exitNotStarted, "--channel", "name one")
	second := fettle("export", chain, "--as", "taps", "--channel", "2")
	second.must(t, exitDone)
	if !strings.HasSuffix(second.stdout, "\n0.5\n0.5\n") {
		t.Errorf("channel 2: %q", second.stdout)
	}
	first := fettle("export", chain, "--as", "taps", "--channel", "1")
	first.must(t, exitDone)
	if !strings.HasSuffix(first.stdout, "\n1\n") {
		t.Errorf("channel 1: %q", first.stdout)
	}
}

// TestExportWAV: a kernel as a recording of 64-bit floats.
func TestExportWAV(t *testing.T) {
	b := newBench(t)
	chain, file := b.chain("stages:\n  - fir: {taps: [0.1, 0.2, -0.3]}\n"), b.path("kernel.wav")
	fettle("export", chain, "--rate", "44.1k", "--as", "wav", "--out", file).must(t, exitDone)
	r, err := audio.Open(file)
	mustDo(t, err)
	defer r.Close()
	got := make([]float64, 4)
	n, err := r.ReadFrames(got)
	mustDo(t, err)
	mustEqual(t, "frames", n, 3)
	mustEqual(t, "samples", [3]float64(got[:3]), [3]float64{0.1, 0.2, -0.3})
	mustEqual(t, "rate", r.Format().SampleRate, 44100)
	info, err := os.Stat(file)
	mustDo(t, err)
	if info.Mode().Perm()&0o077 == 0 {
		t.Errorf("permissions are %v", info.Mode())
	}
}
