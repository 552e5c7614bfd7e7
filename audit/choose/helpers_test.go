package choose

import (
	"slices"
	"testing"

	"fettle/audit/limits"
	"fettle/filter"
	"fettle/filter/stream/machine"
)

func chainOf(t testing.TB, text string) Chain {
	t.Helper()
	c, err := filter.Parse([]byte(text), "chain.yaml")
	if err != nil {
		t.Fatalf("%v in\n%s", err, text)
	}
	return Chain{c, []byte(text)}
}

func limitsOf(t testing.TB, texts ...string) []limits.Limit {
	t.Helper()
	l, err := limits.Parse(texts...)
	if err != nil {
		t.Fatal(err)
	}
	return l
}

func compared(t testing.TB, r Request) *Comparison {
	t.Helper()
	r.Kernel = machine.Portable
	if r.Names == nil {
		r.Names = Usual
	}
	c, err := Compare(r)
	if err != nil {
		t.Fatal(err)
	}
	return c
}

// judgementOf finds the row that holds a realisation.
func judgementOf(t testing.TB, a *Advice, name string) Judgement {
	t.Helper()
	for _, j := range a.Judged {
		if slices.Contains(j.Row.Names(), name) {
			return j
		}
	}
	t.Fatalf("no row holds %s", name)
	return Judgement{}
}

func missedNames(j Judgement) []string {
	var names []string
	for _, v := range j.Missed() {
		names = append(names, v.Name)
	}
	return names
}
