package choose

import (
	"math"
	"os"
	"slices"
	"strings"
	"testing"

	"fettle/audit"
	"fettle/audit/figures"
	"fettle/audit/limits"
	"fettle/filter"
)

// TestAgreement against closed forms: a gain of g dB lies g dB apart, a delay of
// one sample 20 lg 3 = 9.54 dB at half the rate, and channels treated differently
// never agree.
func TestAgreement(t *testing.T) {
	at := func(text string) *Candidate {
		n := newCandidate(chainOf(t, text), AsWritten, 8000)
		if n.Refused != nil {
			t.Fatal(n.Refused)
		}
		return n
	}
	plain := at("stages: []\n")
	for _, c := range []struct {
		text  string
		apart float64
		ok    bool
	}{
		{"stages: []\n", 0, true},
		{"stages: [gain: {by: 0.19 dB}]\n", 0.19, true},
		{"stages: [gain: {by: 0.21 dB}]\n", 0.21, false},
		{"tolerance: 0.2 dB\nstages: [gain: {by: 0.21 dB}]\n", 0.21, true},
		{"stages: [gain: {by: 0 dB}]\nalign: 1\n", 20 * math.Log10(3), false},
		{"stages: [delay: {by: 1 samples}]\n", math.Inf(1), false},
		{"stages: [gain: {by: 0 dB, channels: [1]}]\n", math.Inf(1), false},
	} {
		apart, ok := plain.Agrees(at(c.text))
		if ok != c.ok || !(math.Abs(apart-c.apart) < 1e-6 || apart == c.apart) {
			t.Errorf("%s%g dB apart, agree: %v; want %g, %v", c.text, apart, ok, c.apart, c.ok)
		}
	}
}

// echo is a row of one realisation whose response is an impulse with a fainter
// one some samples before (negative) or after it, at 8 kHz.
func echo(name string, at int, level, targetError float64) *Row {
	h := make([]float64, 4001)
	h[2000] = 1
	h[2000+at] += level
	f := figures.Measure(figures.Response{H: h, Origin: 2000, Rate: 8000})
	chain := Chain{Chain: &filter.Chain{Tolerance: filter.DefaultTolerance}}
	result := &audit.Result{Rate: 8000, Figures: f, TargetErrorDB: targetError}
	return &Row{Candidates: []*Candidate{{Chain: chain, Name: name, Results: []*audit.Result{result}}}}
}

// TestFirstInOrder: of several that keep all limits the first in the order is
// chosen, whatever the order of the rows; if none does, the nearest is named.
func TestFirstInOrder(t *testing.T) {
	iir, linear, zero := echo("iir", 400, 0.01, 0), echo("linear", -400, 0.01, 0), echo("zero", 400, 0.01, 0.7)
	l := limitsOf(t, "pre-ring=-60 dB beyond 5 ms")
	faint := echo("mixed", -400, 1e-5, 0) // -100 dB
	for _, c := range []struct {
		rows         []*Row
		want, nearby *Row
	}{
		{[]*Row{zero, linear, iir}, iir, nil},
		{[]*Row{iir, linear, faint}, faint, nil},
		{[]*Row{linear, zero}, nil, zero}, // zero strays by 1.4 of its limit, linear is 20 dB over
	} {
		a, err := advise(Own, c.rows, slices.Repeat([][]limits.Limit{l}, len(c.rows)))
		if err != nil {
			t.Fatal(err)
		}
		var got *Row
		if a.Chosen != nil {
			got = a.Chosen.Row
		}
		if got != c.want || got == nil && a.Nearest().Row != c.nearby {
			t.Errorf("chosen %+v, nearest %v", a.Chosen, a.Nearest().Row.Names())
		}
	}
}

// TestNotStatedIsNotKept, and a set from memory rules nothing out.
func TestNotStatedIsNotKept(t *testing.T) {
	row := echo("linear", -400, 0.01, 0)
	row.Shown().Results[0].Figures = figures.Measure(figures.Response{Rate: 8000})
	j := judge(row, limitsOf(t, "delay-spread=100 ms"))
	if j.Keeps || len(j.Missed()) != 1 {
		t.Errorf("a limit on what is not stated is kept: %+v", j)
	}
	if j = judge(row, limitsOf(t, "j21")); !j.Keeps {
		t.Errorf("a set from memory rules out: %+v", j)
	}
}

// TestUsersLimitsGoBefore: on the same measure they replace the rule's.
func TestUsersLimitsGoBefore(t *testing.T) {
	names := func(p Purpose, tolerance float64, users ...string) string {
		all, err := ruleOf(p).limitsFor(&filter.Chain{Tolerance: tolerance}, limitsOf(t, users...))
		if err != nil {
			t.Fatal(err)
		}
		var names []string
		for _, l := range all {
			names = append(names, l.Name)
		}
		return strings.Join(names, "; ")
	}
	for got, want := range map[string]string{
		names(Live, 0.1):                                "target-error 0.5 dB; latency 5 ms",
		names(Live, 2, "latency=2 ms"):                  "target-error 2 dB; latency 2 ms",
		names(Master, 0.1, "pre-ring=1 ms", "flanagan"): "target-error 0.5 dB; audibility; pre-ring 1 ms; flanagan",
		names(Master, 0.1, "audibility"):                "target-error 0.5 dB; pre-ring -60 dB beyond 5 ms; audibility",
		names(Own, 0.1, "target-error=3 dB"):            "target-error 3 dB",
	} {
		if got != want {
			t.Errorf("limits %s, want %s", got, want)
		}
	}
}

// TestRulesAreWrittenDown: the package comment says what the rules are.
func TestRulesAreWrittenDown(t *testing.T) {
	doc, err := os.ReadFile("doc.go")
	if err != nil {
		t.Fatal(err)
	}
	text := strings.Join(strings.Fields(strings.ReplaceAll(string(doc), "//", "")), " ")
	for _, r := range rules {
		order := "phase kept first"
		if slices.Equal(r.Order, ringAheadLast) {
			order = "ring ahead last"
		}
		row := string(r.Purpose) + " " + strings.ReplaceAll(strings.Join(r.Limits, "; "), "=", " ") + " " + order
		if !strings.Contains(text, row) {
			t.Errorf("doc.go does not say: %s", row)
		}
	}
	for name, order := range map[string][]string{"ring ahead last": ringAheadLast, "phase kept first": phaseFirst} {
		if !strings.Contains(text, name+": "+strings.Join(order, ", ")) {
			t.Errorf("doc.go does not say: %s: %s", name, strings.Join(order, ", "))
		}
	}
}

// TestSpeedIsMeasured, which says no more than that: how fast depends on what
// else runs.
func TestSpeedIsMeasured(t *testing.T) {
	c := compared(t, Request{Chains: []Chain{chainOf(t, "stages:\n  - bell: {at: 1 kHz, gain: 3 dB, q: 1, channels: [2]}\n")}, Names: []string{"iir"}, Rate: 8000})
	if err := c.MeasureSpeed(); err != nil {
		t.Fatal(err)
	}
	n := c.Rows[0].Shown()
	if !(n.Speed > 0) || math.IsInf(n.Speed, 0) {
		t.Errorf("speed %g", n.Speed)
	}
	if channels := channelsOf(n.Filter); channels != 2 {
		t.Errorf("measured with %d channels, want 2", channels)
	}
}

// TestRefusals: what a chain refuses is listed with its reason.
func TestRefusals(t *testing.T) {
	c := compared(t, Request{Chains: []Chain{chainOf(t, "stages:\n  - lowpass: {at: 1 kHz, order: 4, family: bessel}\n")}, Names: []string{"zero", "iir"}, Rate: 8000})
	if len(c.Refused) != 1 || c.Refused[0].Name != "zero" || !strings.Contains(c.Refused[0].Refused.Error(), "bessel") || len(c.Rows) != 1 {
		t.Errorf("refused %+v, %d rows", c.Refused, len(c.Rows))
	}
	if _, err := ParseName("lin"); err == nil || !strings.Contains(err.Error(), AsMixed) {
		t.Errorf("a wrong name: %v", err)
	}
	if _, err := ParsePurpose("party"); err == nil || !strings.Contains(err.Error(), string(Alignment)) {
		t.Errorf("a wrong purpose: %v", err)
	}
}

// TestWrittenIsDesignedOnce where another candidate would be the same: it then is what that would be
// by itself, and where a stage says otherwise, written is a candidate of its own.
func TestWrittenIsDesignedOnce(t *testing.T) {
	for _, c := range []struct{ text, twin string }{
		{"phase: linear\nstages: [highpass: {at: 100 Hz, order: 2}, delay: {by: 1 ms}]", "linear"},
		{"phase: linear\nstages: [highpass: {at: 100 Hz, order: 2, phase: linear}, notch: {at: 600 Hz, width: 60 Hz, phase: given}]", "linear"},
		{"phase: minimum\nstages: [highpass: {at: 100 Hz, order: 2}]", "minimum"},
		{"stages: [highpass: {at: 100 Hz, order: 2}, biquads: {sections: [[1, 0.2, 0.1, 1, -0.3, 0.1]]}]", "given"},
		{"phase: linear\nstages: [highpass: {at: 100 Hz, order: 2, phase: iir}]", ""},
		{"phase: linear\nstages: [biquads: {sections: [[1, 0.2, 0.1, 1, -0.3, 0.1]]}]", ""},
		{"stages: [highpass: {at: 100 Hz, order: 2, phase: iir}]", ""},
	} {
		chain := chainOf(t, c.text)
		if got := string(chain.asWritten()); got != c.twin {
			t.Errorf("%s: as written it is %q, want %q", c.text, got, c.twin)
		}
		names := []string{"iir", "linear", AsWritten, "minimum", "given"}
		made := candidatesOf(chain, names, 8000)
		for i, n := range made {
			alone := newCandidate(chain, names[i], 8000)
			if n.Name != names[i] || n.Filter.Phase() != alone.Filter.Phase() {
				t.Errorf("%s: candidate %d is %s, a %s, want %s, a %s", c.text, i, n.Name, n.Filter.Phase(), names[i], alone.Filter.Phase())
			}
			if apart, _ := n.Agrees(alone); apart != 0 {
				t.Errorf("%s: %s is %g dB from what it is by itself", c.text, n.Name, apart)
			}
			if shared := n.Filter == made[2].Filter; shared != (n.Name == AsWritten || n.Name == c.twin) {
				t.Errorf("%s: %s shares written's filter: %v", c.text, n.Name, shared)
			}
		}
	}
}
