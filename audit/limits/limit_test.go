package limits

import (
	"errors"
	"strings"
	"testing"

	"fettle/filter"
)

// Limits of a chain, to be refused: where, and in which words.
func TestLimitsOfAChainThatAreNone(t *testing.T) {
	for _, c := range []struct{ item, place, words string }{
		{"audible", "2:10", `there is no limit "audible"; sets are audibility, trained, moller,`},
		{"{pre-rang: 2 ms}", "2:11", `there is no limit "pre-rang"`},
		{"{pre-rang: 2 ms}", "2:11", "measures are pre-ring, post-ring, smear, phase-share, delay-spread, phase-deviation, latency, lead, sum-test, target-error"},
		{"smear", "2:10", "smear is a measure and needs a bound, such as 2 ms"},
		{"pre-ring=-60 dB", "2:10", `there is no limit "pre-ring=-60-dB"`},
		{"{audibility: 2 ms}", "2:23", "audibility is a set with limits of its own; write its name only"},
		{"{smear: 2 dB}", "2:18", `"2 dB" bounds smear, which is in ms; write for instance 2 ms`},
		{"{pre-ring: 2 degrees}", "2:21", `"2 degrees" bounds pre-ring, which is in dB or ms; write for instance -60 dB beyond 5 ms`},
		{"{latency: 3 dB}", "2:20", "latency, which is in ms"},
		{"{sum-test: 3 ms}", "2:21", "sum-test, which is in dB"},
		{"{sum-test: 3 dB}", "2:21", `"3 dB": a bound on sum-test lies between -200 and 0 dB`},
		{"{target-error: -1 dB}", "2:25", "between 0 and 200 dB"},
		{"{pre-ring: 1 dB}", "2:21", "between -200 and 0 dB"},
		{"{pre-ring: -201 dB}", "2:21", "between -200 and 0 dB"},
		{"{post-ring: -1 ms}", "2:22", "between 0 and 60000 ms"},
		{"{delay-spread: 61 s}", "2:25", "between 0 and 60000 ms"},
		{"{delay-spread: -1 samples}", "2:25", "between 0 and 16777216 samples"},
		{"{phase-deviation: -1 degrees}", "2:28", "between 0 and 36000 degrees"},
		{"{pre-ring: -60 dB beyond 6 ms}", "2:21", `"-60 dB beyond 6 ms": energy is stated beyond 2, 5 and 20 ms; for its time to -60 dB bound pre-ring in ms`},
		{"{pre-ring: 3 ms beyond 5 ms}", "2:21", "'beyond' goes with pre-ring and post-ring in dB only"},
		{"{smear: 3 ms beyond 5 ms}", "2:18", "'beyond' goes with"},
		{"{lead: 3 ms pink}", "2:17", `lead knows no weights; leave "pink" out`},
	} {
		chain, err := filter.Parse([]byte("stages: []\nlimits: ["+c.item+"]\n"), "chain.yaml")
		if err != nil {
			t.Errorf("%s: %v", c.item, err)
			continue
		}
		_, err = Resolve(chain.Limits)
		var e *filter.ChainError
		if !errors.As(err, &e) || !strings.HasPrefix(err.Error(), "chain.yaml:"+c.place+": ") || !strings.Contains(err.Error(), c.words) {
			t.Errorf("%s: %v", c.item, err)
		}
	}
}

// The same of a command line, where there is no place.
func TestLimitsOfACommandLineThatAreNone(t *testing.T) {
	for text, words := range map[string]string{
		"":                              `there is no limit ""`,
		"audible":                       `'audible': there is no limit "audible"`,
		"smear":                         "'smear': smear is a measure and needs a bound",
		"smear=":                        `"smear=" has no value; write for instance smear=2 ms`,
		"smear=2":                       `'smear': "2" has no unit; write for instance 2 ms`,
		"smear=2 h":                     `"2 h" has the unit "h"`,
		"smear=fast":                    `"fast" is not a number with a unit; write for instance 2 ms`,
		"audibility=2 ms":               "'audibility': audibility is a set",
		"pre-ring=-60 dB past 5 ms":     `has the unit "dB past 5 ms"`,
		"pre-ring=-60 dB beyond":        `"" is not a number`,
		"pre-ring=-60 dB beyond 5 dB":   `"5 dB" has the unit "dB"; a duration is written such as beyond 5 ms`,
		"pre-ring=-60 dB beyond -5 ms":  "must be above 0 s",
		"pre-ring=-60 dB white pink":    `has the unit "dB white"`,
		"pre-ring=beyond 5 ms":          `"" is not a number`,
		"delay spread=2 ms, smear=2 ms": `has the unit "ms, smear=2 ms"`,
		"delay spread=1e999 ms":         "out of range",
	} {
		if _, err := Parse("audibility", text); err == nil || !strings.Contains(err.Error(), words) {
			t.Errorf("%q: %v", text, err)
		}
	}
}

// What a chain and a command line say alike is the same limit.
func TestChainAndCommandLineAgree(t *testing.T) {
	chain, err := filter.Parse([]byte(`
stages: []
limits:
  - audibility
  - pre-ring: -60 dB beyond 5 ms # as a remark
  - {delay spread:   2   ms}
  - {smear: 480 samples pink}
`), "chain.yaml")
	if err != nil {
		t.Fatal(err)
	}
	ofChain, err := Resolve(chain.Limits)
	if err != nil {
		t.Fatal(err)
	}
	ofLine := must(t, "audibility", "pre-ring=-60 dB beyond 5 ms", "delay spread=2 ms", "smear=480 samples pink")
	s := oneOff(1000, 1.5)
	s.Figures.DelaySpread, s.Figures.Pink.Total, s.Figures.PreRing.Pink.Beyond[1], s.Figures.PreRing.White.Beyond[1] = 2.1e-3, 9e-3, -70, -61
	a, b := Judge(s, ofChain), Judge(s, ofLine)
	for i := range a {
		if a[i].Name != b[i].Name || a[i].Outcome != b[i].Outcome || a[i].Worst != b[i].Worst && a[i].Worst.Weights != b[i].Worst.Weights || a[i].Measure != b[i].Measure {
			t.Errorf("%+v\n%+v", a[i], b[i])
		}
	}
	for i, want := range []string{"chain, line 5", "chain, line 6", "chain, line 7"} {
		if !strings.Contains(a[i+1].Source, want) || b[i+1].Source != "the command line" {
			t.Errorf("sources %q and %q", a[i+1].Source, b[i+1].Source)
		}
	}
	for i, want := range []string{"audibility", "pre-ring -60 dB beyond 5 ms", "delay-spread 2 ms", "smear 480 samples pink"} {
		if a[i].Name != want {
			t.Errorf("%q, want %q", a[i].Name, want)
		}
	}
	if m := a[1].Measure; m != "early energy beyond 5 ms" {
		t.Errorf("measure %q", m)
	}
}

// Every set says what the user needs to know to choose it, under a name of its own.
func TestSetsSayWhatTheyAre(t *testing.T) {
	taken := map[string]bool{}
	for _, m := range Measures() {
		taken[m.Name] = true
	}
	for _, s := range Sets() {
		if s.Source == "" || s.Measure == "" || s.Status != Published && s.Status != FromMemory || !strings.Contains(s.Help, "erived") && !strings.Contains(s.Help, "not known") {
			t.Errorf("%+v", s)
		}
		audible := strings.Contains(s.Measure, "median")
		if audible != strings.Contains(s.Help, "clicks over headphones are stricter than for programme in a room") {
			t.Errorf("%s: %s", s.Name, s.Help)
		}
		if (s.Range == "") != strings.Contains(s.Name, "-masking-") || (s.Range == "") != (s.Between == "") {
			t.Errorf("%s: range %q, between %q", s.Name, s.Range, s.Between)
		}
		if taken[s.Name] {
			t.Errorf("two things are called %s", s.Name)
		}
		taken[s.Name] = true
	}
	for name, want := range map[string]string{
		"audibility": "late bands at 500 to 8000 Hz, early ones at 1000 to 12000 Hz",
		"moller":     "late and early bands at 1000 to 12000 Hz",
		"deer":       "late bands at 2000 Hz, no early ones",
		"j21":        "40 to 15000 Hz",
	} {
		if s, _ := setOf(name); s.Range != want {
			t.Errorf("%s: %q, want %q", name, s.Range, want)
		}
	}
	if s := Sets()[0].String(); !strings.HasPrefix(s, "audibility: late bands: Blauert and Laws 1978") || !strings.HasSuffix(s, "(published)") {
		t.Errorf("%q", s)
	}
}
