package schema_test

import (
	"bytes"
	"encoding/json"
	"fmt"
	"slices"
	"strings"
	"testing"

	"fettle/audit/choose"
	"fettle/audit/limits"
	"fettle/audit/report"
	"fettle/audit/report/schema"
	"fettle/filter"
	"fettle/filter/stream/machine"

	"github.com/santhosh-tekuri/jsonschema/v6"
)

func compiled(t *testing.T, text []byte) *jsonschema.Schema {
	t.Helper()
	doc, err := jsonschema.UnmarshalJSON(bytes.NewReader(text))
	if err != nil {
		t.Fatal(err)
	}
	c := jsonschema.NewCompiler()
	if err := c.AddResource("schema.json", doc); err != nil {
		t.Fatal(err)
	}
	s, err := c.Compile("schema.json")
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// documents are comparisons whose figures are partly not stated, with realisations
// refused, channels apart, limits kept and exceeded, and with nothing left to
// advise.
func documents(t *testing.T) map[string][]byte {
	t.Helper()
	bessel := chainOf(t, "stages:\n  - highpass: {at: 300 Hz, order: 2, family: bessel, channels: [2]}\n")
	silent := chainOf(t, "stages: [gain: {by: -150 dB}, gain: {by: -150 dB}]\n")
	out := map[string][]byte{}
	for name, r := range map[string]choose.Request{
		"each purpose": {Chains: []choose.Chain{bessel, silent}, Names: choose.Usual},
		"by limits":    {Chains: []choose.Chain{bessel}, Names: []string{"iir", "linear"}, Limits: parsed(t, "audibility", "j21", "delay-spread=0 ms")},
		"one purpose":  {Chains: []choose.Chain{bessel}, Names: []string{"linear", "mixed"}, Purpose: choose.Mix},
		"all refused":  {Chains: []choose.Chain{bessel}, Names: []string{"zero"}, Purpose: choose.Live},
	} {
		r.Rate, r.Kernel = 8000, machine.Portable
		c, err := choose.Compare(r)
		if err != nil {
			t.Fatal(err)
		}
		var b bytes.Buffer
		if err := report.CompareJSON(&b, c, "1.2.3"); err != nil {
			t.Fatal(err)
		}
		out[name] = b.Bytes()
	}
	return out
}

func chainOf(t *testing.T, text string) choose.Chain {
	t.Helper()
	c, err := filter.Parse([]byte(text), "chain.yaml")
	if err != nil {
		t.Fatal(err)
	}
	return choose.Chain{Chain: c, Text: []byte(text)}
}

func parsed(t *testing.T, texts ...string) []limits.Limit {
	t.Helper()
	l, err := limits.Parse(texts...)
	if err != nil {
		t.Fatal(err)
	}
	return l
}

func TestComparisonsFollowTheirSchema(t *testing.T) {
	s := compiled(t, schema.Compare)
	docs := documents(t)
	mustFollow(t, s, docs)
	mustRefuseChanges(t, s, docs["by limits"])
}

func mustFollow(t *testing.T, s *jsonschema.Schema, docs map[string][]byte) {
	t.Helper()
	for name, text := range docs {
		doc, err := jsonschema.UnmarshalJSON(bytes.NewReader(text))
		if err != nil {
			t.Fatal(err)
		}
		if err := s.Validate(doc); err != nil {
			t.Errorf("%s: %v", name, err)
		}
	}
}

// mustRefuseChanges: whichever key of a document gets another kind of value, or is
// taken away unless it is optional, the schema no longer holds.
func mustRefuseChanges(t *testing.T, s *jsonschema.Schema, text []byte, optional ...string) {
	t.Helper()
	var doc any
	if err := json.Unmarshal(text, &doc); err != nil {
		t.Fatal(err)
	}
	changes := 0
	check := func(path string, why string) {
		if changes++; s.Validate(doc) == nil {
			t.Errorf("%s of %s passes", why, path)
		}
	}
	var walk func(path string, v any)
	walk = func(path string, v any) {
		switch v := v.(type) {
		case map[string]any:
			for key, old := range v {
				at := path + "." + key
				if !strings.Contains(path, ".not_stated") && !slices.Contains(optional, key) { // whose keys are free
					delete(v, key)
					check(at, "absence")
				}
				v[key] = map[string]any{"no": []any{}}
				check(at, "another kind")
				v[key] = old
				walk(at, old)
			}
		case []any:
			if len(v) > 0 { // one element stands for all
				walk(fmt.Sprintf("%s[0]", path), v[0])
			}
		}
	}
	walk("", doc)
	if changes < 200 {
		t.Errorf("%d changes were tried; the document is too small to prove anything", changes)
	}
}
