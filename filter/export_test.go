package filter

import (
	"bytes"
	"encoding/json"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// exported writes a chain's coefficients to a file and reads them back as a
// chain of one stage.
func exported(t *testing.T, f *Filter, form Form, name, stage string) *Filter {
	t.Helper()
	var b bytes.Buffer
	if err := f.Export(&b, f.paths[0], form); err != nil {
		t.Fatal(err)
	}
	dir := t.TempDir()
	if err := os.WriteFile(filepath.Join(dir, name), b.Bytes(), 0o644); err != nil {
		t.Fatal(err)
	}
	c, err := Parse([]byte("stages: [{"+stage+": {file: "+name+"}}]"), filepath.Join(dir, "chain.yaml"))
	if err != nil {
		t.Fatalf("%v\n%.300s", err, b.String())
	}
	back, err := c.Realise(f.rate, Written)
	if err != nil {
		t.Fatal(err)
	}
	return back
}

// What is exported and read back renders the same bits.
func TestExportedRendersIdentically(t *testing.T) {
	const linear = "phase: linear\nstages: [{highpass: {at: 300 Hz, order: 4}}, {bell: {at: 2 kHz, gain: 4 dB, q: 1}}, {gain: {by: -1.5 dB}}]"
	const low = "phase: minimum\nstages: [{highpass: {at: 300 Hz, order: 3}}, {notch: {at: 1 kHz, q: 5}}]"
	const iir = "phase: iir\nstages: [{bandpass: {at: [300 Hz, 3 kHz], order: 3}}, {allpass: {at: 1 kHz}}, {gain: {by: 2 dB}}]"
	const even = "stages: [{fir: {taps: [0.1, 0.2, 0.2, 0.1]}}]"
	x := noise(8, 2*9000)
	for _, c := range []struct {
		chain       string
		form        Form
		name, stage string
	}{
		{linear, FormTaps, "k.txt", "fir"}, {linear, FormWAV, "k.wav", "fir"}, {linear, FormJSON, "k.json", "fir"},
		{low, FormTaps, "k.txt", "fir"}, {even, FormTaps, "k.txt", "fir"},
		{iir, FormBiquads, "k.txt", "biquads"}, {iir, FormJSON, "k.json", "biquads"},
	} {
		f := realised(t, c.chain, 16000, Written)
		back := exported(t, f, c.form, c.name, c.stage)
		want, got := applied(t, f, 2, x, 1234), applied(t, back, 2, x, 4096)
		if d := worstDifference(got, want); d != 0 {
			t.Errorf("%s as %s: read back it differs by %g", c.chain, c.form, d)
		}
	}
}

// A form that cannot hold the path says which can.
func TestExportRefusals(t *testing.T) {
	for _, c := range []struct {
		chain string
		as    Realisation
		form  Form
		words string
	}{
		{"stages: [{bell: {at: 1 kHz, gain: 3 dB, q: 1}}]", IIR, FormTaps, "biquads can hold it"},
		{"stages: [{bell: {at: 1 kHz, gain: 3 dB, q: 1}}]", IIR, FormWAV, "biquads can hold it"},
		{"stages: [{bell: {at: 1 kHz, gain: 3 dB, q: 1}}]", Linear, FormBiquads, "taps can hold it"},
		{"stages: [{bell: {at: 1 kHz, gain: 3 dB, q: 1}}]", Zero, FormTaps, "json"},
		{"stages: [{bell: {at: 1 kHz, gain: 3 dB, q: 1}}, {fir: {taps: [1, 1]}}]", Written, FormTaps, "json holds both"},
		{"stages: [{delay: {by: 3 samples}}, {bell: {at: 1 kHz, gain: 3 dB, q: 1}}]", IIR, FormBiquads, "json holds it"},
	} {
		f := realised(t, c.chain, 16000, c.as)
		var b bytes.Buffer
		if err := f.Export(&b, f.paths[0], c.form); err == nil || !strings.Contains(err.Error(), c.words) || b.Len() != 0 {
			t.Errorf("%s as %s: %v, %d bytes", c.chain, c.form, err, b.Len())
		}
	}
}

func TestExportJSONHoldsAll(t *testing.T) {
	f := realised(t, "stages: [{fir: {taps: [1, 1]}}, {delay: {by: 3 samples}}, {bell: {at: 1 kHz, gain: 3 dB, q: 1}}, {notch: {at: 50 Hz, q: 3, phase: zero}}]", 16000, Written)
	var b bytes.Buffer
	if err := f.Export(&b, f.paths[0], FormJSON); err != nil {
		t.Fatal(err)
	}
	var doc struct {
		DelaySamples int         `json:"delay_samples"`
		Taps         []float64   `json:"taps"`
		Sections     [][]float64 `json:"sections"`
		ZeroSections [][]float64 `json:"zero_sections"`
	}
	if err := json.Unmarshal(b.Bytes(), &doc); err != nil {
		t.Fatal(err)
	}
	if doc.DelaySamples != 3 || len(doc.Taps) != 2 || len(doc.Sections) != 1 || len(doc.ZeroSections) != 1 {
		t.Errorf("%+v", doc)
	}
}
