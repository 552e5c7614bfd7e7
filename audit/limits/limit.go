package limits

import (
	"fmt"
	"strings"

	"fettle/filter"
)

// Status says how far a limit may be relied on.
type Status string

// Published figures were seen in a source that was read: the original, or one
// that quotes it. FromMemory figures were not; they give advice only. Own are
// the user's.
const (
	Published  Status = "published"
	FromMemory Status = "from memory"
	Own        Status = "own"
)

// Limit is something that figures are judged by: a named set, or one bound of
// the user's.
type Limit struct {
	Name    string
	Source  string // who published it; for the user's own where it was written
	Status  Status
	Measure string // what is compared, in words
	Range   string // where a set says something; "" for what has no frequencies
	Values  string // the table of a set in words; "" for what has no frequencies
	Between string // how a set reads between the points of its table
	Help    string // what a set was derived for

	unit  string // of the verdict's values: "ms", "dB" or "degrees"
	level bool   // a level in dB, of which less is better even below 0
	judge func(s Subject, v *Verdict)
}

// Resolve finds what the limits that were read mean. The error says which name
// or value is none, where it stands, and what is allowed.
func Resolve(read []filter.Limit) ([]Limit, error) {
	var out []Limit
	for _, r := range read {
		l, err := resolve(r)
		if err != nil {
			return nil, err
		}
		out = append(out, l)
	}
	return out, nil
}

// Parse reads limits from a command line.
func Parse(texts ...string) ([]Limit, error) {
	var read []filter.Limit
	for _, text := range texts {
		l, err := filter.ParseLimit(text)
		if err != nil {
			return nil, err
		}
		read = append(read, l)
	}
	return Resolve(read)
}

func resolve(r filter.Limit) (Limit, error) {
	bounded := r.Value != ""
	if set, ok := setOf(r.Name); ok {
		if bounded {
			return Limit{}, r.RefuseValue("%s is a set with limits of its own; write its name only", r.Name)
		}
		return set, nil
	}
	for _, m := range measures {
		if m.Name != r.Name {
			continue
		}
		if !bounded {
			return Limit{}, r.RefuseName("%s is a measure and needs a bound, such as %s", r.Name, m.Example)
		}
		return m.bounded(r)
	}
	return Limit{}, r.RefuseName("there is no limit %q; sets are %s; measures are %s", r.Name, setNames(), measureNames())
}

// Sets lists the named sets.
func Sets() []Limit { return append([]Limit(nil), sets...) }

func setOf(name string) (Limit, bool) {
	for _, s := range sets {
		if s.Name == name {
			return s, true
		}
	}
	return Limit{}, false
}

func setNames() string {
	var names []string
	for _, s := range sets {
		names = append(names, s.Name)
	}
	return strings.Join(names, ", ")
}

// Judge gives a verdict for each limit, in their order.
func Judge(s Subject, limits []Limit) []Verdict {
	var out []Verdict
	for _, l := range limits {
		v := Verdict{Name: l.Name, Source: l.Source, Status: l.Status, Measure: l.Measure, Unit: l.unit, level: l.level}
		l.judge(s, &v)
		v.conclude()
		out = append(out, v)
	}
	return out
}

// String is one line about a limit, for lists.
func (l Limit) String() string {
	if l.Range == "" {
		return fmt.Sprintf("%s: %s (%s)", l.Name, l.Source, l.Status)
	}
	return fmt.Sprintf("%s: %s; %s (%s)", l.Name, l.Source, l.Range, l.Status)
}
