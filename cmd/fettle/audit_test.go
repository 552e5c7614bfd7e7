package main

import (
	"encoding/json"
	"path/filepath"
	"strings"
	"testing"
	"unicode/utf8"
)

func sampleChain(name string) string { return filepath.Join("../../samples/chains", name+".yaml") }

// TestAuditTables: every sample chain in every realisation (given, what they
// are written in, is one of these), in tables of 100 columns at most, at the lowest usual rate that each can serve: linear
// kernels grow with the rate.
func TestAuditTables(t *testing.T) {
	for chain, rate := range map[string]string{"deck": "8 kHz", "interviews": "8 kHz", "monitor": "16 kHz"} {
		for _, phase := range []string{"linear", "minimum", "iir"} {
			got := fettle("audit", "chain", sampleChain(chain), "--rate", rate, "--phase", phase)
			got.must(t, exitDone)
			for line := range strings.Lines(got.stdout) {
				if n := utf8.RuneCountInString(strings.TrimSuffix(line, "\n")); n > 100 {
					t.Errorf("%s, %s: a line of %d columns: %s", chain, phase, n, line)
				}
			}
			for _, word := range []string{rate, "latency removed", "delay spread", "smear", "pre-ring", "1000"} {
				if !strings.Contains(got.stdout, word) {
					t.Errorf("%s, %s: the table does not tell of %q", chain, phase, word)
				}
			}
		}
	}
}

// auditKeys is the JSON contract of one result: for each place in it, the keys
// that are there.
var auditKeys = map[string]string{
	"": "chain phase rate_hz channel stage latency_samples residual_samples lead_ms polarity delay_spread_ms phase_deviation_deg " +
		"sum_test_db target_error_db smear pre_ring post_ring bands curve probes limits not_stated",
	"smear":               "pink white d90_ms d999_ms",
	"smear.pink":          "total_ms magnitude_ms phase_ms",
	"smear.white":         "total_ms magnitude_ms phase_ms",
	"pre_ring":            "white_db pink_db white_ms pink_ms beyond_db",
	"pre_ring.beyond_db":  "2 5 20",
	"post_ring":           "white_db pink_db white_ms pink_ms beyond_db",
	"post_ring.beyond_db": "2 5 20",
	"bands.0":             "centre_hz nominal carried gain_db arrival_ms spread_ms pre_ring_ms post_ring_ms",
	"curve":               "hz magnitude_db phase_deg group_delay_ms",
	"probes":              "disagreement_us",
}

func TestAuditJSON(t *testing.T) {
	b := newBench(t)
	chains := map[string]int{ // and how many results each has
		sampleChain("interviews"): 1,
		b.file("silent.yaml", []byte("stages: [{gain: {by: -150 dB}}, {gain: {by: -150 dB}}]\n")):                                     1,
		b.file("two.yaml", []byte("stages:\n  - delay: {by: 0.5 samples}\n  - bell: {at: 1 kHz, gain: 3 dB, q: 1, channels: [2]}\n")): 2,
	}
	for chain, want := range chains {
		got := fettle("audit", "chain", "--rate", "8k", "--json", "-", chain)
		got.must(t, exitDone)
		results := parseAudit(t, got.stdout)
		mustEqual(t, chain+": results", len(results), want)
		for _, result := range results {
			mustEqual(t, chain+": rate_hz", result["rate_hz"], any(8000.0))
			mustHoldContract(t, chain, result)
		}
	}
}

// TestAuditJSONFile is the same document, and the table is printed too.
func TestAuditJSONFile(t *testing.T) {
	b := newBench(t)
	chain, file := b.chain(filterChain), b.file("old.json", []byte("{\n \"schema\": \"fettle.audit/1\",\n"))
	dashed := fettle("audit", "chain", chain, "--rate", "8k", "--json", "-")
	filed := fettle("audit", "chain", chain, "--rate", "8k", "--json", file)
	filed.must(t, exitDone)
	mustEqual(t, "document", string(read(t, file)), dashed.stdout)
	if !strings.Contains(filed.stdout, "delay spread") {
		t.Errorf("no table beside the file: %q", filed.stdout)
	}
}

// TestRenderJSON: the audit before a render, one result a rate.
func TestRenderJSON(t *testing.T) {
	b := newBench(t)
	b.plain("in/a.wav")
	b.recording("in/b.wav", "pcm16", 2*rate, 1, noise(100, 1))
	got := b.render(filterChain, "--json", "-", b.path("in"))
	got.must(t, exitDone)
	results := parseAudit(t, got.stdout)
	mustEqual(t, "results", len(results), 2)
	mustEqual(t, "first rate", results[0]["rate_hz"], any(float64(rate)))
	mustEqual(t, "second rate", results[1]["rate_hz"], any(2.0*rate))
	b.mustHold("a.wav", "b.wav")
}

func parseAudit(t *testing.T, text string) []map[string]any {
	t.Helper()
	var document struct {
		Schema, Version string
		Results         []map[string]any
	}
	mustDo(t, json.Unmarshal([]byte(text), &document))
	mustEqual(t, "schema", document.Schema, "fettle.audit/1")
	mustEqual(t, "version", document.Version, version())
	return document.Results
}

// mustHoldContract checks keys, and that what is null is explained.
func mustHoldContract(t *testing.T, chain string, result map[string]any) {
	t.Helper()
	reasons := result["not_stated"].(map[string]any)
	for path, keys := range auditKeys {
		at, ok := lookUp(result, path)
		if !ok {
			t.Errorf("%s: no %s", chain, path)
			continue
		}
		for _, key := range strings.Fields(keys) {
			value, ok := at[key]
			if !ok {
				t.Errorf("%s: no key %s in %q", chain, key, path)
			}
			// A result for all channels or for the whole chain names none.
			named := path == "" && (key == "channel" || key == "stage")
			if value == nil && !named && !explained(reasons, path, key) {
				t.Errorf("%s: %s in %q is null, and not_stated does not say why: %v", chain, key, path, reasons)
			}
		}
	}
}

// explained looks for a reason under the figure's own name, with or without its
// unit, or under that of what it belongs to.
func explained(reasons map[string]any, path, key string) bool {
	of, _, _ := strings.Cut(path, ".")
	for name := range reasons {
		if strings.HasPrefix(key, name) || of != "" && strings.HasPrefix(name, of) {
			return true
		}
	}
	return false
}

// lookUp follows a path of keys; "0" is the first element of a list.
func lookUp(at map[string]any, path string) (map[string]any, bool) {
	if path == "" {
		return at, true
	}
	key, rest, _ := strings.Cut(path, ".")
	switch value := at[key].(type) {
	case map[string]any:
		return lookUp(value, rest)
	case []any:
		if first, ok := value[0].(map[string]any); ok && rest == "0" {
			return first, true
		}
	}
	return nil, false
}
