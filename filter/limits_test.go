package filter

import (
	"errors"
	"fmt"
	"math"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"pgregory.net/rapid"
)

// limited puts a limit into a chain.
func limited(item string) string { return "stages: []\nlimits: [" + item + "]\n" }

// What is no limit whatever names there are.
var brokenLimits = []broken{
	{"stages: []\n»limits:", []string{"'limits' is empty"}},
	{"stages: []\nlimits: »audibility", []string{`"audibility"`, "a list such as [audibility, {delay-spread: 2 ms}]"}},
	{"stages: []\nlimits: »{smear: 2 ms}", []string{"a mapping", "must be a list"}},
	{limited("»[audibility]"), []string{"a limit is a list"}},
	{limited("»{}"), []string{"one measure with its value such as {delay-spread: 2 ms}", "0 names"}},
	{limited("»~"), []string{"0 names"}},
	{limited("»{smear: 2 ms, lead: 3 ms}"), []string{"2 names"}},
	{limited("audibility, {»smear: }"), []string{"'smear' is empty"}},
	{limited("{smear: »\" \"}"), []string{"'smear' is empty", "-60 dB beyond 5 ms"}},
	{limited("{smear: »[2 ms]}"), []string{"a list", "one value"}},
	{limited("{smear: »{pink: 2 ms}}"), []string{"a mapping", "one value"}},
	{limited("{smear: »2}"), []string{"'smear'", `"2" has no unit`, "2 ms, 10 degrees, or -60 dB beyond 5 ms"}},
	{limited("{smear: »ms}"), []string{`"ms" is not a number`}},
	{limited("{smear: »2 kHz}"), []string{`unit "kHz"`}},
	{limited("{smear: »nan ms}"), []string{`"nan ms"`}},
	{limited("{pre-ring: »-60 dB beyond}"), []string{`"" is not a number`, "beyond 5 ms"}},
	{limited("{pre-ring: »-60 dB beyond 5}"), []string{`"5" has no unit`, "beyond 5 ms"}},
	{limited("{pre-ring: »-60 dB beyond 240 samples}"), []string{`unit "samples"`, "beyond 5 ms"}},
	{limited("{pre-ring: »-60 dB beyond 0 ms}"), []string{"above 0 s"}},
	{limited("{pre-ring: »-60 dB after 5 ms}"), []string{`unit "dB after 5 ms"`}},
	{limited("{pre-ring: »pink}"), []string{`"" is not a number`}},
	{"stages: []\nlimits:\n  - audibility\n  - pre-ring: »-60", []string{"no unit"}},
	{"stages: []\nlimits:\n  - »pre-ring: -60 dB\n    smear: 2 ms", []string{"2 names"}},
}

func TestLimits(t *testing.T) {
	got := parsed(t, `stages: []
limits: # one
  - audibility # two
  - pre-ring:   -60 dB   beyond 5 ms
  - {delay spread: 480 samples}
  - {phase-deviation: 10 deg}
  - {smear: 2500us pink}
`).Limits
	want := []Limit{
		{Name: "audibility", file: "chain.yaml", name: place{3, 5}},
		{Name: "pre-ring", Value: "-60 dB beyond 5 ms", Bound: Bound{Amount: -60, Unit: DB, Beyond: 5e-3}, file: "chain.yaml", name: place{4, 5}, val: place{4, 17}},
		{Name: "delay-spread", Value: "480 samples", Bound: Bound{Amount: 480, Unit: Samples}, file: "chain.yaml", name: place{5, 6}, val: place{5, 20}},
		{Name: "phase-deviation", Value: "10 deg", Bound: Bound{Amount: 10, Unit: Degrees}, file: "chain.yaml", name: place{6, 6}, val: place{6, 23}},
		{Name: "smear", Value: "2500us pink", Bound: Bound{Amount: 2.5e-3, Unit: Seconds, Weights: Pink}, file: "chain.yaml", name: place{7, 6}, val: place{7, 13}},
	}
	if diff := cmp.Diff(want, got, cmp.AllowUnexported(Limit{}, place{})); diff != "" {
		t.Errorf("(-want +got)\n%s", diff)
	}
	if none := parsed(t, "stages: []\nlimits: []").Limits; len(none) != 0 {
		t.Errorf("%v", none)
	}
	for i, l := range got {
		fromLine := l.Name
		if l.Value != "" {
			fromLine += "=" + l.Value
		}
		same, err := ParseLimit(fromLine)
		if err != nil || same.Name != l.Name || same.Value != l.Value || same.Bound != l.Bound {
			t.Errorf("%s gave %+v, %v; the chain %+v", fromLine, same, err, l)
		}
		if l.Where() != fmt.Sprintf("the chain, line %d", 3+i) || same.Where() != "the command line" {
			t.Errorf("%q and %q", l.Where(), same.Where())
		}
	}
}

// A refusal stands where the name or the value stands; on a command line it
// names the limit.
func TestRefusals(t *testing.T) {
	l := parsed(t, limited("audibility, {smear: 2 ms}")).Limits[1]
	for want, err := range map[string]error{
		"chain.yaml:2:23: no 7": l.RefuseName("no %d", 7),
		"chain.yaml:2:30: no 8": l.RefuseValue("no %d", 8),
	} {
		var e *ChainError
		if !errors.As(err, &e) || err.Error() != want {
			t.Errorf("%v, want %s", err, want)
		}
	}
	// A file without a name is a file all the same.
	c, err := Parse([]byte(limited("audibility")), "")
	if err != nil {
		t.Fatal(err)
	}
	if got := c.Limits[0].RefuseName("no").Error(); got != ":2:10: no" {
		t.Error(got)
	}
	line, err := ParseLimit("delay  spread = 2 ms")
	if err != nil || line.RefuseValue("no").Error() != "'delay-spread': no" {
		t.Errorf("%+v, %v", line, err)
	}
}

// Any bound that is written in the grammar is read as it was meant.
func TestBoundGrammar(t *testing.T) {
	factor := map[string]float64{"s": 1, "ms": 1e-3, "us": 1e-6, "dB": 1, "degrees": 1, "deg": 1, "samples": 1}
	unit := map[string]Unit{"s": Seconds, "ms": Seconds, "us": Seconds, "dB": DB, "degrees": Degrees, "deg": Degrees, "samples": Samples}
	rapid.Check(t, func(t *rapid.T) {
		number := rapid.Float64Range(-1e6, 1e6).Draw(t, "number")
		as := rapid.SampledFrom([]string{"s", "ms", "us", "dB", "degrees", "deg", "samples"}).Draw(t, "unit")
		blank := rapid.SampledFrom([]string{"", " ", "   "}).Draw(t, "blank")
		text := fmt.Sprintf("x=%g%s%s", number, blank, as)
		want := Bound{Amount: number * factor[as], Unit: unit[as]}
		if rapid.Bool().Draw(t, "beyond") {
			ms := rapid.Float64Range(0.001, 1e3).Draw(t, "ms")
			text += fmt.Sprintf(" beyond %gms", ms)
			want.Beyond = ms * 1e-3
		}
		if w := rapid.SampledFrom([]Weights{"", White, Pink}).Draw(t, "weights"); w != "" {
			text += " " + string(w)
			want.Weights = w
		}
		got, err := ParseLimit(text)
		if err != nil || got.Bound != want {
			t.Fatalf("%s gave %+v, %v; want %+v", text, got.Bound, err, want)
		}
	})
}

// No text makes the reader of command lines give a bound that is not finite.
func TestParseLimitOfAnything(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		words := rapid.SliceOf(rapid.SampledFrom([]string{"=", "x", "-", "1", "e999", ".", "dB", "ms", "beyond", "pink", " ", "nan", "\n", "é"})).Draw(t, "words")
		l, err := ParseLimit(strings.Join(words, ""))
		if b := l.Bound; err == nil && (math.IsNaN(b.Amount+b.Beyond) || math.IsInf(b.Amount+b.Beyond, 0)) {
			t.Fatalf("%q gave %+v", words, b)
		}
	})
}
