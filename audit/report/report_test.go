package report

import (
	"bytes"
	"encoding/json"
	"math"
	"strings"
	"testing"
	"unicode/utf8"

	"fettle/audit"
	"fettle/audit/figures"
	"fettle/filter"
	"fettle/filter/stream/machine"
)

// results audits a chain whose channels are treated in three ways and whose
// low bands are not carried.
func results(t *testing.T) []*audit.Result {
	t.Helper()
	const text = `
name: a name so long that no table of a hundred columns could ever hold it whole
phase: iir
stages:
  - bandpass: {at: [300 Hz, 3400 Hz], order: 4}
  - gain: {by: -120 dB, channels: [2]}
  - notch: {at: 1 kHz, q: 3, channels: [3]}
`
	c, err := filter.Parse([]byte(text), "chain.yaml")
	if err != nil {
		t.Fatal(err)
	}
	f, err := c.Realise(48000, filter.Written)
	if err != nil {
		t.Fatal(err)
	}
	r, err := audit.Chain(f, machine.Best())
	if err != nil {
		t.Fatal(err)
	}
	return r
}

func TestTextFits(t *testing.T) {
	all := results(t)
	var b bytes.Buffer
	if err := Brief(&b, append(all, all...)); err != nil {
		t.Fatal(err)
	}
	for _, r := range all {
		if err := Text(&b, r); err != nil {
			t.Fatal(err)
		}
	}
	for _, line := range strings.Split(b.String(), "\n") {
		if n := utf8.RuneCountInString(line); n > Width {
			t.Errorf("%d columns: %s", n, line)
		}
	}
	for _, want := range []string{"not carried", "ch 2", "others", "samples", "none"} {
		if !strings.Contains(b.String(), want) {
			t.Errorf("the text lacks %q:\n%s", want, b.String())
		}
	}
}

// The keys that the JSON contract names.
func TestJSONContract(t *testing.T) {
	all := results(t)
	var b bytes.Buffer
	if err := JSON(&b, all, "1.2.3"); err != nil {
		t.Fatal(err)
	}
	var doc struct {
		Schema, Version string
		Results         []map[string]any
	}
	if err := json.Unmarshal(b.Bytes(), &doc); err != nil {
		t.Fatal(err)
	}
	if doc.Schema != "fettle.audit/1" || doc.Version != "1.2.3" || len(doc.Results) != 3 {
		t.Fatalf("schema %q, version %q, %d results", doc.Schema, doc.Version, len(doc.Results))
	}
	r := doc.Results[0]
	for _, key := range strings.Fields(`chain phase rate_hz channel stage latency_samples residual_samples lead_ms polarity
		delay_spread_ms phase_deviation_deg sum_test_db target_error_db smear.pink.total_ms smear.pink.magnitude_ms smear.pink.phase_ms
		smear.white.total_ms smear.d90_ms smear.d999_ms pre_ring.white_db pre_ring.pink_db pre_ring.white_ms pre_ring.pink_ms
		pre_ring.beyond_db.2 pre_ring.beyond_db.5 pre_ring.beyond_db.20 post_ring.white_db post_ring.beyond_db.20
		curve.hz curve.magnitude_db curve.phase_deg curve.group_delay_ms probes.disagreement_us limits not_stated bands`) {
		if _, ok := lookUp(r, key); !ok {
			t.Errorf("the report has no %s", key)
		}
	}
	band := r["bands"].([]any)[0].(map[string]any)
	for _, key := range strings.Fields("centre_hz nominal carried gain_db arrival_ms spread_ms pre_ring_ms post_ring_ms") {
		if _, ok := band[key]; !ok {
			t.Errorf("a band has no %s", key)
		}
	}
	if got, _ := lookUp(r, "delay_spread_ms"); got != 1e3*all[0].Figures.DelaySpread {
		t.Errorf("delay_spread_ms is %v, the figure %g s", got, all[0].Figures.DelaySpread)
	}
	// The band-pass turns the phase at its bulk latency by 122 degrees: no
	// polarity can be stated, and the report says why.
	if r["polarity"] != nil || r["not_stated"].(map[string]any)["polarity"] == nil {
		t.Errorf("polarity %v, not_stated %v", r["polarity"], r["not_stated"])
	}
}

func lookUp(tree map[string]any, key string) (any, bool) {
	head, rest, more := strings.Cut(key, ".")
	v, ok := tree[head]
	if !ok || !more {
		return v, ok
	}
	sub, ok := v.(map[string]any)
	if !ok {
		return nil, false
	}
	return lookUp(sub, rest)
}

func TestNotStatedIsNull(t *testing.T) {
	for _, c := range []struct {
		v    float64
		want string
	}{{math.NaN(), "null"}, {math.Inf(1), "null"}, {-200, "-200"}, {0.1, "0.1"}} {
		got, err := json.Marshal(number(c.v))
		if err != nil || string(got) != c.want {
			t.Errorf("%g is %s, want %s (%v)", c.v, got, c.want, err)
		}
	}
}

func TestFiguresInText(t *testing.T) {
	for _, c := range []struct{ got, want string }{
		{decimal(-0.0000001, 2), "0.00"}, {decimal(-1.005, 1), "-1.0"}, {decimal(math.NaN(), 3), "-"},
		{ringLevel(figures.None), "none"}, {ringLevel(-42.13), "-42.1 dB"}, {ringLevel(math.NaN()), "-"},
		{hertz(44100), "44.1 kHz"}, {hertz(800), "800 Hz"}, {clip("abcdef", 5), "ab..."}, {clip("abc", 5), "abc"},
		{microseconds(math.NaN()), "not stated"},
	} {
		if c.got != c.want {
			t.Errorf("%q, want %q", c.got, c.want)
		}
	}
}
