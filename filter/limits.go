package filter

import (
	"fmt"
	"slices"
	"strings"

	"github.com/goccy/go-yaml/ast"
)

// Limit is one entry of a chain's limits, or of a command line's, as it is
// written: the name of a set of limits, or a measure with its bound. Which names
// there are and which bounds suit them is for the audit to say.
type Limit struct {
	Name  string // its words joined by hyphens
	Value string // the bound as written, one blank between words; "": none
	Bound Bound  // of Value

	file      string
	name, val place // nowhere in a file: a command line
}

// Bound is how far a measure may go: an amount, where needed with how far from
// the peak it counts and under which weights.
type Bound struct {
	Amount  float64 // in Unit
	Unit    Unit
	Beyond  float64 // s, above 0; 0: not given
	Weights Weights
}

// Unit is what an amount counts.
type Unit string

// Times come in seconds, or in samples as they were written.
const (
	DB      Unit = "dB"
	Degrees Unit = "degrees"
	Seconds Unit = "s"
	Samples Unit = "samples"
)

// Weights says how frequencies count in a figure; "": not given.
type Weights string

// White counts all frequencies alike, Pink by 1/f.
const (
	White Weights = "white"
	Pink  Weights = "pink"
)

// boundExample is shown where a bound cannot be read.
const boundExample = "2 ms, 10 degrees, or -60 dB beyond 5 ms"

// ParseLimit reads a limit from a command line: a set's name such as
// "audibility", or a measure and its bound such as
// "pre-ring=-60 dB beyond 5 ms".
func ParseLimit(text string) (Limit, error) {
	name, value, bounded := strings.Cut(text, "=")
	l := Limit{Name: limitName(name), Value: spaced(value)}
	if bounded && l.Value == "" {
		return l, fmt.Errorf("%s has no value; write for instance %s=2 ms", quote(text), strings.TrimSpace(name))
	}
	return l.withBound()
}

func (l Limit) withBound() (Limit, error) {
	if l.Value == "" {
		return l, nil
	}
	var err error
	if l.Bound, err = parseBound(l.Value); err != nil {
		return l, fmt.Errorf("'%s': %w", l.Name, err)
	}
	return l, nil
}

// limitName makes "delay spread" of a command line the "delay-spread" of a file.
func limitName(text string) string { return strings.Join(strings.Fields(text), "-") }

func spaced(text string) string { return strings.Join(strings.Fields(text), " ") }

// parseBound reads AMOUNT [beyond TIME] [white|pink].
func parseBound(text string) (Bound, error) {
	var b Bound
	words := strings.Fields(text)
	if last := len(words) - 1; last >= 0 && (words[last] == string(White) || words[last] == string(Pink)) {
		b.Weights, words = Weights(words[last]), words[:last]
	}
	if i := slices.Index(words, "beyond"); i >= 0 {
		beyond := strings.Join(words[i+1:], " ")
		var err error
		if b.Beyond, err = (dimension{duration.name, duration.units, "beyond 5 ms"}).parse(beyond); err != nil {
			return b, err
		}
		if !(b.Beyond > 0) {
			return b, fmt.Errorf("beyond %s: it must be above 0 s", quote(beyond))
		}
		words = words[:i]
	}
	return b, b.parseAmount(strings.Join(words, " "))
}

// amounts are the units that an amount may be written in.
var amounts = map[string]struct {
	unit   Unit
	factor float64
}{
	"dB": {DB, 1}, "degrees": {Degrees, 1}, "degree": {Degrees, 1}, "deg": {Degrees, 1},
	"s": {Seconds, duration.units["s"]}, "ms": {Seconds, duration.units["ms"]}, "us": {Seconds, duration.units["us"]},
	"samples": {Samples, 1}, "sample": {Samples, 1},
}

func (b *Bound) parseAmount(text string) error {
	number, unit, err := splitQuantity(text)
	if err != nil {
		return fmt.Errorf("%w; write for instance %s", err, boundExample)
	}
	a, ok := amounts[unit]
	switch {
	case ok:
		b.Amount, b.Unit = number*a.factor, a.unit
		return nil
	case unit == "":
		return fmt.Errorf("%s has no unit; write for instance %s", quote(text), boundExample)
	}
	return fmt.Errorf("%s has the unit %s; write for instance %s", quote(text), quote(unit), boundExample)
}

// limits reads a chain's list of limits.
func (d *decoder) limits(f *fields) []Limit {
	n, ok := f.get("limits")
	if !ok {
		return nil
	}
	var out []Limit
	for _, item := range d.list(n, "limits", "[audibility, {delay-spread: 2 ms}]") {
		if d.err == nil {
			out = append(out, d.limit(item))
		}
	}
	return out
}

func (d *decoder) limit(n ast.Node) Limit {
	l := Limit{file: d.file, name: placeOf(n)}
	if text, ok := scalar(n); ok {
		l.Name = limitName(text)
		return l
	}
	item := d.mapping(n, "a limit", n)
	if d.err != nil {
		return l
	}
	if len(item.order) != 1 {
		d.fail(n, "a limit is the name of a set, or one measure with its value such as {delay-spread: 2 ms}; here are %d names", len(item.order))
		return l
	}
	key := item.order[0]
	value, _ := item.get(key)
	l.Name, l.Value = limitName(key), spaced(d.text(value, key))
	l.name, l.val = placeOf(item.keys[key].Key), placeOf(value)
	if d.err == nil && l.Value == "" {
		d.fail(value, "'%s' is empty; give it a value such as %s", key, boundExample)
	}
	bounded, err := l.withBound()
	if err != nil {
		d.fail(value, "%v", err)
	}
	return bounded
}

func placeOf(n ast.Node) place {
	line, column := position(n)
	return place{line, column}
}

// Where says where the limit was written.
func (l Limit) Where() string {
	if l.name == (place{}) {
		return "the command line"
	}
	return fmt.Sprintf("the chain, line %d", l.name.line)
}

// RefuseName is the error that the limit's name is none: a *ChainError at the
// name where it stands in a chain file.
func (l Limit) RefuseName(format string, args ...any) error { return l.refuse(l.name, format, args) }

// RefuseValue is the error that the limit's value does not suit its name: a
// *ChainError at the value where it stands in a chain file.
func (l Limit) RefuseValue(format string, args ...any) error { return l.refuse(l.val, format, args) }

func (l Limit) refuse(at place, format string, args []any) error {
	msg := fmt.Sprintf(format, args...)
	if l.name == (place{}) {
		return fmt.Errorf("'%s': %s", l.Name, msg)
	}
	return &ChainError{l.file, at.line, at.column, msg}
}
