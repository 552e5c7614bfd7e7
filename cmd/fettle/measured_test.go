package main

import (
	"encoding/json"
	"math"
	"os"
	"strings"
	"testing"
	"unicode/utf8"

	"fettle/audio"
	"fettle/audit/probe"
)

// measuredJSON is what these tests read of an audit.
type measuredJSON struct {
	Results []struct {
		Latency  float64 `json:"latency_samples"`
		Residual float64 `json:"residual_samples"`
		Polarity *int
		Measured struct {
			Absent     string
			Latency    float64 `json:"latency_samples"`
			LatencyErr float64 `json:"latency_samples_err"`
		}
		Bands []struct {
			Nominal    float64
			Carried    bool
			Arrival    *float64 `json:"arrival_ms"`
			ArrivalErr *float64 `json:"arrival_ms_err"`
		}
		ThroughFile []struct{ Within, Bands int } `json:"through_file"`
	}
	Capture *struct{ Repeats int }
	Pair    *struct{ Verdict, Reason string }
}

func decoded(t *testing.T, text string) (m measuredJSON) {
	t.Helper()
	mustDo(t, json.Unmarshal([]byte(text), &m))
	return m
}

// steepChain has bands arrive ms apart.
const steepChain = "phase: iir\nstages:\n  - highpass: {at: 100 Hz, order: 4}\n"

// mustAgree compares band arrivals, latency included, with a chain's own audit: nine of
// ten carried bands lie within the 95 % interval, to which slack in ms is added.
func mustAgree(t *testing.T, chain, got measuredJSON, rate, slack float64) {
	t.Helper()
	a, b := chain.Results[0], got.Results[0]
	within, all := 0, 0
	for i, x := range a.Bands {
		y := b.Bands[i]
		if !x.Carried || y.Arrival == nil {
			continue
		}
		if y.ArrivalErr == nil {
			t.Fatalf("%g Hz has no interval", x.Nominal)
		}
		all++
		off := math.Abs(*y.Arrival - *x.Arrival + (b.Measured.Latency-a.Residual)*1e3/rate)
		if off <= *y.ArrivalErr+b.Measured.LatencyErr*1e3/rate+slack {
			within++
		}
	}
	if all < 10 || 10*within < 9*all {
		t.Errorf("%d of %d bands are within their intervals", within, all)
	}
}

// TestCaptureOfARender: a probe that went through render is measured as the chain is.
func TestCaptureOfARender(t *testing.T) {
	b := newBench(t)
	chain := b.chain(steepChain)
	fettle("probe", "chirp", "--rate", "8k", "--seconds", "2", "--from", "4 Hz", "--out", b.path("probe.wav")).must(t, exitDone)
	fettle("render", "--chain", chain, "--out", b.Out, b.path("probe.wav")).must(t, exitDone)
	treated := b.path("out/probe.wav")
	own := fettle("audit", "chain", "--rate", "8k", "--json", "-", chain)
	got := fettle("audit", "capture", "--json", "-", b.path("probe.wav"), treated)
	got.must(t, exitDone)
	m := decoded(t, got.stdout)
	if m.Capture == nil || m.Capture.Repeats != 3 {
		t.Fatalf("the capture is %+v", m.Capture)
	}
	mustAgree(t, decoded(t, own.stdout), m, rate, 1e-3)

	page := b.path("page.html")
	text := fettle("audit", "capture", b.path("probe.wav"), treated, "--limit", "delay-spread=1 ms", "--html", page, "--csv", b.path("bands.csv"), "--curve-csv", b.path("curve.csv"))
	text.must(t, exitLimit)
	for _, word := range []string{"3 of 3", "±", "exceeded", "latency", "order 2"} {
		if !strings.Contains(text.stdout, word) {
			t.Errorf("the table does not tell of %q", word)
		}
	}
	for i, line := range strings.Split(text.stdout, "\n") {
		if n := utf8.RuneCountInString(line); n > 100 && i > 1 { // the title holds file names
			t.Errorf("a line of %d columns: %s", n, line)
		}
	}
	for name, want := range map[string]string{"page.html": "<svg", "bands.csv": "arrival_ms_err", "curve.csv": "group_delay_ms_err"} {
		if !strings.Contains(string(read(t, b.path(name))), want) {
			t.Errorf("%s holds no %q", name, want)
		}
	}
}

// TestCaptureRefusals: whatever is not a probe and its capture is told as such.
func TestCaptureRefusals(t *testing.T) {
	b := newBench(t)
	probeFile := b.path("probe.wav")
	fettle("probe", "chirp", "--rate", "8k", "--seconds", "1", "--out", probeFile).must(t, exitDone)
	other := b.recording("noise.wav", "pcm16", rate, 1, noise(8*rate, 1))
	slower := b.recording("slower.wav", "pcm16", rate/2, 1, noise(8*rate, 1))
	fettle("audit", "capture", other, probeFile).must(t, exitNotStarted, "swapped", "name the probe first")
	fettle("audit", "capture", probeFile, other).must(t, exitNotStarted, "noise.wav", "the probe is not in the capture")
	fettle("audit", "capture", other, other).must(t, exitNotStarted, "noise.wav", "not the parameters of a probe")
	fettle("audit", "capture", probeFile, slower).must(t, exitNotStarted, "slower.wav", "4000 Hz", "8000 Hz")
	fettle("audit", "capture", probeFile).must(t, exitNotStarted, "two files", "PROBE")
	fettle("audit", "capture", probeFile, b.path("none.wav")).must(t, exitNotStarted, "none.wav")
}

// TestProbeFiles: a probe's file says what it is, is not written over, and is warned of.
func TestProbeFiles(t *testing.T) {
	b := newBench(t)
	name := b.path("impulse.wav")
	got := fettle("probe", "impulse", "--rate", "8k", "--seconds", "0.5", "--repeats", "4", "--channels", "2", "--dither", "16", "--format", "pcm16", "--level", "-3 dB", "--out", name)
	got.must(t, exitDone)
	for _, word := range []string{"impulse", "4 times", "ears", "volume"} {
		if !strings.Contains(got.stdout, word) {
			t.Errorf("%q does not say %q", got.stdout, word)
		}
	}
	rec, err := audio.Open(name)
	mustDo(t, err)
	defer rec.Close()
	p, err := probe.Of(rec)
	mustDo(t, err)
	if p.Kind != probe.Impulse || p.Repeats != 4 || p.Channels != 2 || p.Dither != 16 || p.Level != -3 || rec.Frames() != p.Frames() {
		t.Errorf("the file holds %+v and %d frames", p, rec.Frames())
	}
	mustDo(t, p.Verify(rec))
	before := read(t, name)
	fettle("probe", "chirp", "--out", name).must(t, exitNotStarted, "is there already")
	if string(read(t, name)) != string(before) {
		t.Error("it was written over")
	}
	fettle("probe", "chirp").must(t, exitNotStarted, "--out")
	fettle("probe", "chirp", "--out", b.path("x.wav"), "--seconds", "0").must(t, exitNotStarted, "seconds")
	fettle("probe", "chirp", "--out", b.path("x.wav"), "--to", "30 kHz").must(t, exitNotStarted, "30000")
	fettle("probe", "noise").must(t, exitNotStarted, "noise")
	if _, err := os.Stat(b.path("x.wav")); err == nil {
		t.Error("a refused probe was written")
	}
}

// TestPairOfARender: a render beside its original is measured as its chain is, and
// what is no render of it is refused.
func TestPairOfARender(t *testing.T) {
	b := newBench(t)
	chain := b.chain(steepChain)
	original := b.recording("talk.wav", "pcm24", rate, 1, noise(30*rate, 1))
	other := b.recording("other.wav", "pcm24", rate, 1, noise(30*rate, 2))
	fettle("render", "--chain", chain, "--out", b.Out, original).must(t, exitDone)
	own := fettle("audit", "chain", "--rate", "8k", "--json", "-", chain)
	got := fettle("audit", "pair", "--json", "-", original, b.path("out/talk.wav"))
	got.must(t, exitDone)
	m := decoded(t, got.stdout)
	if m.Pair == nil || m.Pair.Verdict != "filtered" {
		t.Fatalf("the pair is %+v", m.Pair)
	}
	mustAgree(t, decoded(t, own.stdout), m, rate, 1e-3)
	fettle("audit", "pair", original, b.path("out/talk.wav"), "--limit", "delay-spread=1 ms", "--html", b.path("page.html"), "--plots", b.path("plots")).must(t, exitLimit)

	text := fettle("audit", "pair", original, other)
	if text.must(t, exitNotStarted); !strings.Contains(text.stdout, "unrelated: ") {
		t.Errorf("stdout %q", text.stdout)
	}
	fettle("audit", "pair", original, other, "--json", "-").must(t, exitNotStarted, "not related by a linear filter")
	fettle("audit", "pair", original).must(t, exitNotStarted, "two files", "ORIGINAL")
}

// TestAuditThroughFile: what ships is what was computed.
func TestAuditThroughFile(t *testing.T) {
	chain := newBench(t).chain(steepChain)
	got := fettle("audit", "chain", "--rate", "8k", "--through-file", "pcm24", "--json", "-", chain)
	got.must(t, exitDone)
	files := decoded(t, got.stdout).Results[0].ThroughFile
	if len(files) != 2 {
		t.Fatalf("%d probes went through files, want a chirp and an impulse", len(files))
	}
	for i, f := range files {
		if f.Bands < 15 || 10*f.Within < 9*f.Bands {
			t.Errorf("probe %d: %d of %d bands are within their intervals", i, f.Within, f.Bands)
		}
	}
	if text := fettle("audit", "chain", "--rate", "8k", "--through-file", "pcm16", chain); !strings.Contains(text.stdout, "16-bit PCM, by impulse") {
		t.Errorf("no table: %s", text.stdout)
	}
	fettle("audit", "chain", "--rate", "8k", "--through-file", "pcm7", chain).must(t, exitNotStarted, "--through-file", "pcm7")
}
