package report

import (
	"bytes"
	"encoding/csv"
	"encoding/json"
	"flag"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
	"unicode/utf8"

	"fettle/audit/choose"
	"fettle/audit/limits"
	"fettle/filter"
	"fettle/filter/stream/machine"

	"github.com/google/go-cmp/cmp"
)

// -update writes the tables anew. Read them before you commit them.
var update = flag.Bool("update", false, "write testdata/compare-*.txt anew")

const stem = `stages:
  - highpass: {at: 80 Hz, order: 4}
  - bell: {at: 3 kHz, gain: 2 dB, q: 0.9}
`

const lateRight = `stages:
  - highpass: {at: 100 Hz, order: 3}
  - lowpass: {at: 3 kHz, order: 2, channels: [2]}
`

// comparisonOf compares at 8 kHz.
func comparisonOf(t *testing.T, names []string, purpose choose.Purpose, limit []string, texts ...string) *choose.Comparison {
	t.Helper()
	r := choose.Request{Names: names, Rate: 8000, Purpose: purpose}
	var err error
	if r.Limits, err = limits.Parse(limit...); err != nil {
		t.Fatal(err)
	}
	return compared(t, r, texts...)
}

// heardComparison compares with a sample recording.
func heardComparison(t *testing.T, recording string, rate int, text string) *choose.Comparison {
	t.Helper()
	return compared(t, choose.Request{Names: choose.Usual, Rate: rate, Purpose: choose.Master, Recording: "../../samples/recordings/" + recording}, text)
}

// compared compares chains. Speeds are made up: 1000, 2000 and so on.
func compared(t *testing.T, r choose.Request, texts ...string) *choose.Comparison {
	t.Helper()
	r.Kernel = machine.Portable
	for i, text := range texts {
		c, err := filter.Parse([]byte(text), "chain"+strconv.Itoa(i+1)+".yaml")
		if err != nil {
			t.Fatal(err)
		}
		r.Chains = append(r.Chains, choose.Chain{Chain: c, Text: []byte(text)})
	}
	c, err := choose.Compare(r)
	if err != nil {
		t.Fatal(err)
	}
	for i, row := range c.Rows {
		row.Shown().Speed = 1000 * float64(i+1)
	}
	return c
}

// comparisons are what the golden tables show.
func comparisons(t *testing.T) map[string]*choose.Comparison {
	t.Helper()
	return map[string]*choose.Comparison{
		"each":     comparisonOf(t, choose.Usual, choose.Own, nil, stem),
		"master":   comparisonOf(t, choose.Usual, choose.Master, nil, stem),
		"heard":    heardComparison(t, "interviews/deckhand_side_a.wav", 16000, stem),
		"channels": comparisonOf(t, choose.Usual, choose.Own, []string{"delay-spread=1 ms", "pre-ring=-60 dB beyond 5 ms"}, lateRight, stem),
	}
}

func TestCompareTables(t *testing.T) {
	for name, c := range comparisons(t) {
		var b bytes.Buffer
		if err := Compare(&b, c); err != nil {
			t.Fatal(err)
		}
		for line := range strings.Lines(b.String()) {
			if n := utf8.RuneCountInString(strings.TrimSuffix(line, "\n")); n > Width {
				t.Errorf("%s: %d columns: %s", name, n, line)
			}
		}
		file := filepath.Join("testdata", "compare-"+name+".txt")
		if *update {
			if err := os.WriteFile(file, b.Bytes(), 0o666); err != nil {
				t.Fatal(err)
			}
		}
		want, err := os.ReadFile(file)
		if err != nil {
			t.Fatal(err)
		}
		if diff := cmp.Diff(string(want), b.String()); diff != "" {
			t.Errorf("%s: %s", name, diff)
		}
	}
}

// TestCompareAgrees: table, CSV and JSON say the same of the row that is
// recommended.
func TestCompareAgrees(t *testing.T) {
	c := comparisonOf(t, []string{"iir", "linear"}, choose.Mix, nil, stem)
	var table, rows, doc bytes.Buffer
	if err := Compare(&table, c); err != nil {
		t.Fatal(err)
	}
	if err := CompareCSV(&rows, c); err != nil {
		t.Fatal(err)
	}
	if err := CompareJSON(&doc, c, "1.2.3"); err != nil {
		t.Fatal(err)
	}
	cells, err := csv.NewReader(&rows).ReadAll()
	if err != nil || len(cells) != 3 {
		t.Fatalf("%d rows: %v", len(cells), err)
	}
	at := map[string]string{}
	for i, column := range cells[0] {
		at[column] = cells[2][i]
	}
	if at["phase"] != "linear" || at["recommended_for"] != "mix" || at["worst_limit"] == "" || at["times_real_time"] != "2000" {
		t.Errorf("row %v", at)
	}
	var read struct {
		Rows []struct {
			Realisations []string
			Results      []struct {
				Smear struct {
					Pink struct {
						Total float64 `json:"total_ms"`
					}
				}
				Limits []struct{ Name string }
			}
		}
		Advice []struct{ Chosen *int }
	}
	if err := json.Unmarshal(doc.Bytes(), &read); err != nil {
		t.Fatal(err)
	}
	if len(read.Advice) != 1 || read.Advice[0].Chosen == nil || *read.Advice[0].Chosen != 1 {
		t.Fatalf("advice %+v", read.Advice)
	}
	linear := read.Rows[1]
	if got := strconv.FormatFloat(linear.Results[0].Smear.Pink.Total, 'g', 9, 64); got != at["smear_pink_ms"] || len(linear.Results[0].Limits) != 2 {
		t.Errorf("JSON has a smear of %s ms and limits %v, CSV %s ms", got, linear.Results[0].Limits, at["smear_pink_ms"])
	}
	for _, want := range []string{"take linear", "iir: misses sum-test -0.5 dB by"} {
		if !strings.Contains(table.String(), want) {
			t.Errorf("the words lack %q: %s", want, table.String())
		}
	}
}

func TestCompareTitle(t *testing.T) {
	names := []string{"iir", "linear"}
	for want, c := range map[string]*choose.Comparison{
		"chain1: 2 realisations side by side at 8 kHz":            comparisonOf(t, names, choose.Own, nil, stem),
		"chain1 and chain2: 4 realisations side by side at 8 kHz": comparisonOf(t, names, choose.Own, nil, lateRight, stem),
		"chain1: one realisation at 8 kHz":                        comparisonOf(t, names[:1], choose.Own, nil, stem),
		"0 realisations side by side at 8 kHz":                    comparisonOf(t, []string{"zero"}, choose.Own, nil, lateRight),
	} {
		if got := CompareTitle(c); got != want {
			t.Errorf("%q, want %q", got, want)
		}
	}
}

func TestListed(t *testing.T) {
	for want, names := range map[string][]string{"": nil, "a": {"a"}, "a and b": {"a", "b"}, "a, b and c": {"a", "b", "c"}} {
		if got := listed(names); got != want {
			t.Errorf("%q, want %q", got, want)
		}
	}
}
