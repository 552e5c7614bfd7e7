package schema_test

import (
	"bytes"
	"context"
	"io"
	"math/rand/v2"
	"testing"

	"fettle/audio"
	"fettle/audio/pcm"
	"fettle/audit"
	"fettle/audit/capture"
	"fettle/audit/onsets"
	"fettle/audit/pair"
	"fettle/audit/probe"
	"fettle/audit/report"
	"fettle/audit/report/schema"
	"fettle/filter"
	"fettle/filter/stream/machine"

	goaudio "github.com/go-audio/audio"
)

// playing is a source of interleaved samples.
func playing(rate, channels int, samples []float64) audio.Source {
	return audio.FromFrames(&goaudio.Format{SampleRate: rate, NumChannels: channels}, samples)
}

// audits are of chains with channels and stages apart, figures not stated, limits, a
// recording and files; of captures with and without the probe in a channel; and of pairs
// that are filtered and not.
func audits(t *testing.T) map[string][]byte {
	t.Helper()
	return map[string][]byte{
		"chain":           chainAudit(t, "stages:\n  - highpass: {at: 300 Hz, order: 2, channels: [2]}\n", true),
		"silent chain":    chainAudit(t, "stages: [gain: {by: -150 dB}, gain: {by: -150 dB}]\n", false),
		"capture":         captureAudit(t, 3),
		"one repeat":      captureAudit(t, 1),
		"pair":            pairAudit(t, func(x []float64) []float64 { return x }),
		"unrelated pair":  pairAudit(t, func(x []float64) []float64 { return noise(len(x), 2) }),
		"silent original": pairAudit(t, func(x []float64) []float64 { return make([]float64, len(x)) }),
	}
}

func chainAudit(t *testing.T, text string, heard bool) []byte {
	t.Helper()
	const rate = 8000
	f, err := chainOf(t, text).Realise(rate, filter.Written)
	if err != nil {
		t.Fatal(err)
	}
	results, err := audit.Chain(f, machine.Portable)
	if err != nil {
		t.Fatal(err)
	}
	for _, r := range results {
		r.Judge(parsed(t, "audibility", "j21", "delay-spread=0 ms", "smear=1 s"))
	}
	h := report.Heard{}
	if heard {
		to, err := pcm.ParseEncoding("pcm16")
		if err != nil {
			t.Fatal(err)
		}
		if err := audit.Ship(context.Background(), f, results, machine.Portable, to); err != nil {
			t.Fatal(err)
		}
		h.Recording = "noise.wav"
		x := noise(rate, 1)
		if h.Onsets, err = onsets.Measure(playing(rate, 1, x), playing(rate, 1, x), onsets.Options{}); err != nil {
			t.Fatal(err)
		}
		stages, err := audit.Stages(f.Chain(), rate, filter.Written, machine.Portable)
		if err != nil {
			t.Fatal(err)
		}
		results = append(results, stages...)
	}
	return written(t, func(w io.Writer) error { return report.JSONHeard(w, results, h, "1.2.3") })
}

// captureAudit is of a device whose second channel is silent.
func captureAudit(t *testing.T, repeats int) []byte {
	t.Helper()
	r := probe.Defaults(probe.Chirp, 2000)
	r.Seconds, r.Repeats = 1, repeats
	p, err := r.Plan()
	if err != nil {
		t.Fatal(err)
	}
	x := make([]float64, p.Frames())
	if _, err := p.Source().ReadFrames(x); err != nil {
		t.Fatal(err)
	}
	hiss := noise(2*len(x), 3)
	y := make([]float64, 2*len(x))
	for i := range y {
		if y[i] = 1e-5 * hiss[i]; i%2 == 0 {
			y[i] += 0.5*x[i/2] + 0.1*x[i/2]*x[i/2]
		}
	}
	c, err := capture.Measure(p, playing(p.Rate, 2, y))
	if err != nil {
		t.Fatal(err)
	}
	c.Judge(parsed(t, "delay-spread=1 ms", "pre-ring=-60 dB", "latency=1 s"))
	return written(t, func(w io.Writer) error {
		return report.CaptureJSON(w, report.Names{From: "probe.wav", To: "capture.wav"}, c, "1.2.3")
	})
}

func pairAudit(t *testing.T, do func(x []float64) []float64) []byte {
	t.Helper()
	const rate = 8000
	x := noise(20*rate, 1)
	open := func(x []float64) pair.Opener {
		return func() (audio.Source, error) { return playing(rate, 1, x), nil }
	}
	r, err := pair.Measure(open(x), open(do(x)))
	if err != nil {
		t.Fatal(err)
	}
	r.Judge(parsed(t, "delay-spread=1 ms", "pre-ring=-60 dB", "audibility"))
	return written(t, func(w io.Writer) error {
		return report.PairJSON(w, report.Names{From: "a.wav", To: "b.wav"}, r, "1.2.3")
	})
}

func noise(n int, seed uint64) []float64 {
	random := rand.New(rand.NewPCG(seed, 0))
	x := make([]float64, n)
	for i := range x {
		x[i] = 0.1 * random.NormFloat64()
	}
	return x
}

func written(t *testing.T, write func(io.Writer) error) []byte {
	t.Helper()
	var b bytes.Buffer
	if err := write(&b); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

func TestAuditsFollowTheirSchema(t *testing.T) {
	s := compiled(t, schema.Audit)
	docs := audits(t)
	mustFollow(t, s, docs)
	for _, name := range []string{"chain", "capture", "pair"} {
		mustRefuseChanges(t, s, docs[name], "through_file", "products", "coherence")
	}
}
