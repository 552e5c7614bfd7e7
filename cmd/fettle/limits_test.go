package main

import (
	"encoding/csv"
	"encoding/json"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// combChain rings for long: a hum comb, linear.
const combChain = "phase: linear\nstages:\n  - notch: {at: 500 Hz, width: 20 Hz}\n"

const strict = "limits: [{pre-ring: -60 dB beyond 5 ms}]\n"

// TestLimitStopsARender before anything is written, unless it is told to go on.
func TestLimitStopsARender(t *testing.T) {
	b := newBench(t)
	b.plain("in/a.wav")
	got := b.render(combChain+strict, b.path("in"))
	got.must(t, exitLimit, "a limit of the chain is exceeded", "nothing was written", "--over-limit")
	if !strings.Contains(got.stdout, "1 exceeded") {
		t.Errorf("the table does not say so: %s", got.stdout)
	}
	b.mustHold()
	b.render(combChain+strict, "--over-limit", b.path("in")).must(t, exitLimit)
	b.mustHold("a.wav")

	b = newBench(t)
	b.plain("in/a.wav")
	b.render(combChain+"limits: [{pre-ring: -3 dB beyond 5 ms}]\n", b.path("in")).must(t, exitDone)
	b.mustHold("a.wav")
}

// TestLimitsOfAnAudit: verdicts, statuses and the JSON's keys.
func TestLimitsOfAnAudit(t *testing.T) {
	b := newBench(t)
	got := fettle("audit", "chain", "--rate", "8k", "--json", "-", b.chain(combChain), "--limit", "pre-ring=-60 dB beyond 5 ms", "--limit", "audibility")
	got.must(t, exitLimit)
	var doc struct {
		Results []struct {
			Limits []struct {
				Name, Status, Outcome string
				Pass                  *bool
				Worst                 struct{ Value, Limit *float64 }
			}
		}
	}
	mustDo(t, json.Unmarshal([]byte(got.stdout), &doc))
	l := doc.Results[0].Limits
	if len(l) != 2 || l[0].Pass == nil || *l[0].Pass || l[0].Worst.Value == nil || !(*l[0].Worst.Value > *l[0].Worst.Limit) || l[1].Pass == nil || !*l[1].Pass || l[1].Status != "published" {
		t.Errorf("limits %+v", l)
	}
	fettle("audit", "chain", b.chain(combChain), "--limit", "loudness").must(t, exitNotStarted, "--limit", "loudness")
	fettle("audit", "chain", b.chain(combChain+"limits: [loudness]\n")).must(t, exitNotStarted, "chain.yaml:4:", "loudness")
	b.plain("in/a.wav")
	b.render(combChain+"limits: [loudness]\n", b.path("in")).must(t, exitNotStarted, "loudness")
	if sets := fettle("audit", "limits"); sets.status != exitDone || !strings.Contains(sets.stdout, "audibility") || !strings.Contains(sets.stdout, "headphones") {
		t.Errorf("audit limits: %+v", sets)
	}
}

// TestRatesAndStages: one column a rate, one row a stage.
func TestRatesAndStages(t *testing.T) {
	b := newBench(t)
	got := fettle("audit", "chain", "--rates", "8k, 16k", "--stages", b.chain("stages:\n  - highpass: {at: 100 Hz, order: 2}\n  - gain: {by: -3 dB}\n"))
	got.must(t, exitDone)
	for _, want := range []string{"8 kHz", "16 kHz", "highpass: {at: 100 Hz, order: 2}", "gain: {by: -3 dB}"} {
		if !strings.Contains(got.stdout, want) {
			t.Errorf("no %q in %s", want, got.stdout)
		}
	}
	for line := range strings.Lines(got.stdout) {
		if len(line) > 101 {
			t.Errorf("a line of %d columns: %s", len(line), line)
		}
	}
	fettle("audit", "chain", "--rates", "8k", "--rate", "8k", b.chain(identityChain)).must(t, exitNotStarted, "--rates")
}

// TestCSV: as many rows as bands and frequencies, under the names of the columns.
func TestCSV(t *testing.T) {
	b := newBench(t)
	bands, curve := b.path("bands.csv"), b.path("curve.csv")
	for range 2 { // the second time it replaces its own
		fettle("audit", "chain", "--rate", "8k", "--csv", bands, "--curve-csv", curve, b.chain(filterChain)).must(t, exitDone)
	}
	for path, column := range map[string]string{bands: "arrival_ms", curve: "group_delay_ms"} {
		f, err := os.Open(path)
		mustDo(t, err)
		rows, err := csv.NewReader(f).ReadAll()
		mustDo(t, err, f.Close())
		if len(rows) < 20 || !strings.Contains(strings.Join(rows[0], " "), column) {
			t.Errorf("%s: %d rows under %q", path, len(rows), rows[0])
		}
	}
	fettle("audit", "chain", "--csv", b.file("notes.csv", []byte("mine\n")), b.chain(filterChain)).must(t, exitNotStarted, "notes.csv", "no report")
}

// TestMethods: the paragraph names what was done.
func TestMethods(t *testing.T) {
	b := newBench(t)
	got := fettle("audit", "chain", "--methods", "--rate", "8k", b.chain("name: Test\n"+linearChain))
	got.must(t, exitDone)
	text := strings.Join(strings.Fields(got.stdout), " ")
	for _, want := range []string{"\"Test\"", "SHA-256", "8000 Hz", "highpass: {at: 100 Hz, order: 2}", "linear phase of type I", "-3 dB lies at 1", "bulk latency", "whole samples", "not causal"} {
		if !strings.Contains(text, want) {
			t.Errorf("no %q in %s", want, text)
		}
	}
}

// TestRecordingOfAnAudit: its onsets are found, at its own rate, in text and JSON.
func TestRecordingOfAnAudit(t *testing.T) {
	recording := filepath.Join("..", "..", "samples", "recordings", "interviews", "engine tender.wav")
	got := fettle("audit", "chain", "--recording", recording, sampleChain("monitor"))
	got.must(t, exitDone)
	if !strings.Contains(got.stdout, "onsets of") || !strings.Contains(got.stdout, "channel 1: ") {
		t.Errorf("no onsets in %s", got.stdout)
	}
	got = fettle("audit", "chain", "--json", "-", "--recording", recording, sampleChain("monitor"))
	var doc struct {
		Onsets struct {
			Recording string
			Channels  []struct {
				Found   int
				ShiftMS struct{ Worst *float64 } `json:"shift_ms"`
			}
		}
	}
	mustDo(t, json.Unmarshal([]byte(got.stdout), &doc))
	c := doc.Onsets.Channels
	if doc.Onsets.Recording != recording || len(c) != 1 || c[0].Found < 5 || c[0].ShiftMS.Worst == nil || !(math.Abs(*c[0].ShiftMS.Worst) < 20) {
		t.Errorf("onsets %+v", doc.Onsets)
	}
	fettle("audit", "chain", "--recording", "nothing.wav", sampleChain("interviews")).must(t, exitNotStarted, "nothing.wav")
}
