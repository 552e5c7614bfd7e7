package filter

import (
	"math"

	"github.com/goccy/go-yaml/ast"
)

// The readers here take a node and the key it stands under. A node that is
// missing has been complained of already: they give a zero value for it.

// text is a single value as it was written.
func (d *decoder) text(n ast.Node, key string) string {
	text, ok := scalar(n)
	if n != nil && !ok {
		d.fail(n, "'%s' is %s; it must be one value", key, describe(n))
	}
	return text
}

// quantity reads a value with a unit.
func (d *decoder) quantity(n ast.Node, key string, dim dimension) float64 {
	text := d.text(n, key)
	if d.err != nil {
		return 0
	}
	v, err := dim.parse(text)
	if err != nil {
		d.fail(n, "'%s': %v", key, err)
	}
	return v
}

// number reads a plain number.
func (d *decoder) number(n ast.Node, key string) float64 {
	text := d.text(n, key)
	if d.err != nil {
		return 0
	}
	v, unit, err := splitQuantity(text)
	switch {
	case err != nil:
		d.fail(n, "'%s' is %s; write a finite number", key, describe(n))
	case unit != "":
		d.fail(n, "'%s' is %s; it is a plain number, without a unit", key, describe(n))
	}
	return v
}

// whole reads a whole number from lo to hi.
func (d *decoder) whole(n ast.Node, key string, lo, hi int) int {
	v := d.number(n, key)
	if d.err == nil && !isWhole(v, float64(lo), float64(hi)) {
		d.fail(n, "'%s' is %s; it is a whole number from %d to %d", key, describe(n), lo, hi)
	}
	return int(v)
}

// hz reads a frequency.
func (d *decoder) hz(n ast.Node, key string) float64 {
	v := d.quantity(n, key, frequency)
	if d.err != nil {
		return 0
	}
	if err := checkHz(v); err != nil {
		d.fail(n, "'%s' is %s; %v", key, describe(n), err)
	}
	d.highest = math.Max(d.highest, v)
	return v
}

// decibels reads a level.
func (d *decoder) decibels(n ast.Node, key string) float64 {
	v := d.quantity(n, key, level)
	if !(math.Abs(v) <= maxDB) {
		d.fail(n, "'%s' is %s; it lies between -%d dB and %d dB", key, describe(n), maxDB, maxDB)
	}
	return v
}

// list opens a node as a list.
func (d *decoder) list(n ast.Node, key, example string) []ast.Node {
	if n == nil {
		return nil
	}
	s, ok := n.(*ast.SequenceNode)
	if !ok {
		d.fail(n, "'%s' is %s; it must be a list such as %s", key, describe(n), example)
		return nil
	}
	return s.Values
}

// numbers reads a list of plain numbers.
func (d *decoder) numbers(n ast.Node, key, example string) []float64 {
	var out []float64
	for _, v := range d.list(n, key, example) {
		out = append(out, d.number(v, key))
	}
	return out
}

// hz reads a frequency that must be there.
func (f *fields) hz(key string) float64 { return f.d.hz(f.need(key, "70 Hz"), key) }

// hzPair reads [lo, hi], two rising frequencies.
func (f *fields) hzPair(key string) []float64 {
	const example = "[300 Hz, 3400 Hz]"
	n := f.need(key, example)
	nodes := f.d.list(n, key, example)
	if f.d.err == nil && len(nodes) != 2 {
		f.d.fail(n, "'%s' is a list of %d; a band has two edges such as %s", key, len(nodes), example)
	}
	out := make([]float64, 2)
	for i, v := range nodes[:min(2, len(nodes))] {
		out[i] = f.d.hz(v, key)
	}
	if f.d.err == nil && !(out[0] < out[1]) {
		f.d.fail(n, "'%s' runs from %g Hz to %g Hz; the lower edge comes first", key, out[0], out[1])
	}
	return out
}

// gain reads a level of either sign that must be there.
func (f *fields) gain(key string) float64 { return f.d.decibels(f.need(key, "-2.5 dB"), key) }

// positiveDB reads a level above 0 dB, or gives the fallback.
func (f *fields) positiveDB(key string, fallback float64) float64 {
	n, ok := f.get(key)
	if !ok {
		return fallback
	}
	v := f.d.decibels(n, key)
	if f.d.err == nil && !(v > 0) {
		f.d.fail(n, "'%s' is %s; it must be above 0 dB", key, describe(n))
	}
	return v
}

// positive reads a plain number above zero, such as a q, that must be there.
func (f *fields) positive(key string) float64 {
	n := f.need(key, "0.7")
	v := f.d.number(n, key)
	if f.d.err == nil && !(v > 0 && v <= maxQ) {
		f.d.fail(n, "'%s' is %s; it must be above 0 and at most %.0f", key, describe(n), float64(maxQ))
	}
	return v
}

// seconds reads a stretch of time above 0 that does not depend on the rate.
func (f *fields) seconds(key string) float64 {
	n := f.need(key, "500 ms")
	v := f.d.quantity(n, key, dimension{duration.name, duration.units, "500 ms"})
	if f.d.err == nil && !(v > 0 && v <= maxSeconds) {
		f.d.fail(n, "'%s' is %s; it must be above 0 s and at most %d s", key, describe(n), maxSeconds)
	}
	return v
}

// hzOrShare reads a width: a frequency, or per cent of one.
func (f *fields) hzOrShare(key string) (hz, share float64) {
	n := f.need(key, "2 Hz")
	text := f.d.text(n, key)
	if percent, unit, err := splitQuantity(text); err == nil && unit == "%" {
		if !(percent > 0 && percent < 100) {
			f.d.fail(n, "'%s' is %s; it lies between 0 %% and 100 %%", key, describe(n))
		}
		return 0, percent / 100
	}
	return f.d.hz(n, key), 0
}
