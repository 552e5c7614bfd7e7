package main

import (
	"encoding/csv"
	"encoding/json"
	"os"
	"strings"
	"testing"
	"unicode/utf8"
)

const speechChain = `# speech
stages:
  - highpass: {at: 80 Hz, order: 4}
  - bell: {at: 2 kHz, gain: 2 dB, q: 0.9}
`

// compared is what a test reads of the JSON document.
type compared struct {
	Schema, Version string
	Rows            []struct {
		Realisations  []string
		TimesRealTime float64 `json:"times_real_time"`
	}
	Refused []struct{ Realisation, Reason string }
	Advice  []struct {
		For    string
		Chosen *int
	}
}

func parseCompared(t *testing.T, text string) compared {
	t.Helper()
	var doc compared
	mustDo(t, json.Unmarshal([]byte(text), &doc))
	mustEqual(t, "schema", doc.Schema, "fettle.compare/1")
	mustEqual(t, "version", doc.Version, version())
	return doc
}

// chosen names the row of an advice by its realisations.
func (c compared) chosen(advice int) string {
	if c.Advice[advice].Chosen == nil {
		return ""
	}
	return strings.Join(c.Rows[*c.Advice[advice].Chosen].Realisations, " ")
}

// TestCompareTable: without a purpose there is advice for each; the speed is
// measured.
func TestCompareTable(t *testing.T) {
	b := newBench(t)
	file := b.path("rows.json")
	got := fettle("compare", "--rate", "8k", b.chain(speechChain), "--json", file)
	got.must(t, exitDone)
	for line := range strings.Lines(got.stdout) {
		if n := utf8.RuneCountInString(strings.TrimSuffix(line, "\n")); n > 100 {
			t.Errorf("a line of %d columns: %s", n, line)
		}
	}
	for _, want := range []string{"written, iir, minimum", "agree within their tolerances", "mixed has highpass", "mix        linear"} {
		if !strings.Contains(got.stdout, want) {
			t.Errorf("no %q in %s", want, got.stdout)
		}
	}
	doc := parseCompared(t, string(read(t, file)))
	mustEqual(t, "advices", len(doc.Advice), 5)
	for _, row := range doc.Rows {
		if !(row.TimesRealTime > 0) {
			t.Errorf("%v: no speed was measured", row.Realisations)
		}
	}
}

// TestCompareByLimits: the chain's and the command line's count, and a status
// tells when none keeps them.
func TestCompareByLimits(t *testing.T) {
	b := newBench(t)
	compare := func(chain string, args ...string) outcome {
		return fettle(append([]string{"compare", "--rate", "8k", "--json", "-", "--as", "written,linear,mixed,iir", b.chain(chain)}, args...)...)
	}
	got := compare(speechChain, "--limit", "pre-ring=-60 dB beyond 5 ms")
	got.must(t, exitDone)
	mustEqual(t, "by a limit", parseCompared(t, got.stdout).chosen(0), "mixed")
	got = compare(speechChain + "limits: [{latency: 0.1 ms}]\n")
	got.must(t, exitDone)
	mustEqual(t, "by a limit of the chain", parseCompared(t, got.stdout).chosen(0), "written iir")
	got = compare(speechChain, "--for", "alignment", "--limit", "latency=1 ms")
	got.must(t, exitLimit)
	mustEqual(t, "where none does", parseCompared(t, got.stdout).chosen(0), "")
	compare(speechChain, "--for", "alignment", "--limit", "latency=1 ms", "--save", b.path("new.yaml")).must(t, exitLimit, "nothing was written")
}

// TestCompareRefusals: what a chain refuses is listed; if that is all, nothing can
// be done.
func TestCompareRefusals(t *testing.T) {
	b := newBench(t)
	bessel := b.chain("stages:\n  - highpass: {at: 80 Hz, order: 2, family: bessel}\n")
	got := fettle("compare", "--rate", "8k", "--as", "iir,zero", "--json", "-", bessel)
	got.must(t, exitDone)
	doc := parseCompared(t, got.stdout)
	if len(doc.Refused) != 1 || doc.Refused[0].Realisation != "zero" || !strings.Contains(doc.Refused[0].Reason, "bessel") {
		t.Errorf("refused %+v", doc.Refused)
	}
	got = fettle("compare", "--rate", "8k", "--as", "zero", bessel)
	got.must(t, exitNotStarted, "every realisation is refused")
	if !strings.Contains(got.stdout, "zero is refused") {
		t.Errorf("no reason in %s", got.stdout)
	}
}

// TestCompareSave: the saved chain realises as advised, and no file is replaced.
func TestCompareSave(t *testing.T) {
	b := newBench(t)
	chain, saved := b.chain(speechChain), b.path("advised.yaml")
	save := func(args ...string) outcome {
		return fettle(append([]string{"compare", "--rate", "8k", chain, "--for", "master"}, args...)...)
	}
	save("--save", saved).must(t, exitDone)
	mustEqual(t, "saved", string(read(t, saved)), `# speech
phase: linear
stages:
  - highpass: {phase: iir, at: 80 Hz, order: 4}
  - bell: {at: 2 kHz, gain: 2 dB, q: 0.9}
`)
	got := fettle("compare", "--rate", "8k", "--as", "written, mixed", "--json", "-", saved)
	got.must(t, exitDone)
	mustEqual(t, "rows of the saved chain", len(parseCompared(t, got.stdout).Rows), 1)

	save("--save", saved).must(t, exitNotStarted, "advised.yaml", "is there already")
	save("--save", chain).must(t, exitNotStarted, "is there already")
	mustEqual(t, "the chain", string(read(t, chain)), speechChain)
	fettle("compare", chain, "--save", b.path("x.yaml")).must(t, exitNotStarted, "--save", "--for")
	mustEqual(t, "to standard output", save("--save", "-").stdout, string(read(t, saved)))
}

// TestCompareSaveElsewhere: a chain's coefficient files must be found from where it
// is saved.
func TestCompareSaveElsewhere(t *testing.T) {
	b := newBench(t)
	b.file("taps.txt", []byte("0.25 0.5 0.25\n"))
	chain := b.chain("stages:\n  - fir: {file: taps.txt}\n  - bell: {at: 1 kHz, gain: 3 dB, q: 1}\n")
	mustDo(t, os.Mkdir(b.path("sub"), 0o777))
	args := []string{"compare", "--rate", "8k", "--as", "linear", "--for", "mix", chain, "--save"}
	fettle(append(args, b.path("sub/new.yaml"))...).must(t, exitNotStarted, "sub", "chain.yaml", "beside")
	if _, err := os.Stat(b.path("sub/new.yaml")); !os.IsNotExist(err) {
		t.Errorf("something was written: %v", err)
	}
	fettle(append(args, b.path("new.yaml"))...).must(t, exitDone)
	if text := string(read(t, b.path("new.yaml"))); !strings.Contains(text, "fir: {phase: linear, file: taps.txt}") {
		t.Errorf("saved %s", text)
	}
}

// TestCompareRecording: at the recording's own rate, which --rate may repeat but not change.
func TestCompareRecording(t *testing.T) {
	b := newBench(t)
	const recording = "../../samples/recordings/interviews/deckhand_side_a.wav" // 16 kHz
	compare := func(args ...string) outcome {
		return fettle(append([]string{"compare", "--as", "iir,linear", b.chain(speechChain), "--recording", recording}, args...)...)
	}
	got := compare("--json", "-")
	got.must(t, exitDone)
	var doc struct {
		RateHz int `json:"rate_hz"`
		Rows   []struct {
			Onsets struct {
				Recording string
				Channels  []struct{ Found int }
			}
		}
	}
	mustDo(t, json.Unmarshal([]byte(got.stdout), &doc))
	mustEqual(t, "rate", doc.RateHz, 16000)
	mustEqual(t, "rows", len(doc.Rows), 2)
	for _, row := range doc.Rows {
		mustEqual(t, "recording", row.Onsets.Recording, recording)
		if len(row.Onsets.Channels) != 1 || row.Onsets.Channels[0].Found < 4 { // a slate and three plosives
			t.Errorf("onsets %+v", row.Onsets)
		}
	}
	compare("--rate", "16k").must(t, exitDone)
	compare("--rate", "48k").must(t, exitNotStarted, "--rate", "48000 Hz", "16000 Hz", "leave out --rate")
	fettle("compare", b.chain(speechChain), "--recording", b.path("none.wav")).must(t, exitNotStarted, "--recording", "none.wav")
	right := b.file("right.yaml", []byte("stages:\n  - highpass: {at: 80 Hz, order: 4, channels: [2]}\n"))
	fettle("compare", right, "--recording", recording).must(t, exitNotStarted, "channel 2", "right.yaml")
}

func TestCompareCSV(t *testing.T) {
	b := newBench(t)
	file := b.path("rows.csv")
	one, two := b.chain(filterChain), b.file("two.yaml", []byte(speechChain))
	for range 2 { // the second time it replaces its own
		fettle("compare", "--rate", "8k", "--as", "iir,linear", "--csv", file, one, two).must(t, exitDone)
	}
	f, err := os.Open(file)
	mustDo(t, err)
	rows, err := csv.NewReader(f).ReadAll()
	mustDo(t, err, f.Close())
	mustEqual(t, "rows", len(rows), 1+2*2)
	mustEqual(t, "file of the last", rows[4][5], two)
}

func TestCompareUsage(t *testing.T) {
	b := newBench(t)
	chain := b.chain(filterChain)
	for _, c := range []struct {
		args  []string
		words string
	}{
		{nil, "at least one chain"},
		{[]string{chain, "--as", "lin"}, "--as"},
		{[]string{chain, "--as", "iir,iir"}, "twice"},
		{[]string{chain, "--for", "party"}, "alignment"},
		{[]string{chain, "--limit", "loudness"}, "--limit"},
		{[]string{chain, "--rate", "0"}, "--rate"},
		{[]string{b.path("none.yaml")}, "no such chain file"},
		{[]string{b.file("bad.yaml", []byte("stages: [{bell: {}}]\n"))}, "bad.yaml:1:"},
		{[]string{b.file("limit.yaml", []byte("stages: []\nlimits: [loudness]\n"))}, "limit.yaml:2:"},
		{[]string{chain, "--json", b.file("notes.txt", []byte("mine\n"))}, "no report"},
	} {
		got := fettle(append([]string{"compare"}, c.args...)...)
		got.must(t, exitNotStarted, c.words)
		mustEqual(t, "standard output", got.stdout, "")
	}
}
