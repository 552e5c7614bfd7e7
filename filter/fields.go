package filter

import (
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"

	"github.com/goccy/go-yaml/ast"
	"github.com/goccy/go-yaml/token"
)

// decoder reads one chain file. It keeps the first error and goes on with
// zero values, so that reading code need not check at every step.
type decoder struct {
	file string
	err  *ChainError
}

func (d *decoder) fail(n ast.Node, format string, args ...any) {
	if d.err != nil {
		return
	}
	d.err = &ChainError{File: d.file, Msg: fmt.Sprintf(format, args...)}
	d.err.Line, d.err.Column = position(n)
}

// position is where a node's own text begins. The parser puts a mapping at
// its first colon; its first key is meant.
func position(n ast.Node) (line, column int) {
	if m, ok := n.(*ast.MappingNode); ok && len(m.Values) > 0 && !m.IsFlowStyle {
		n = m.Values[0].Key
	}
	if m, ok := n.(*ast.MappingValueNode); ok {
		n = m.Key
	}
	var t *token.Token
	if n != nil {
		t = n.GetToken()
	}
	if t == nil {
		return 0, 0
	}
	return t.Position.Line, t.Position.Column
}

// fields is one mapping: every key asked for is one that may stand there, and
// done complains of the rest.
type fields struct {
	d     *decoder
	owner string // what the mapping describes: "a chain", "stage bell"
	node  ast.Node
	keys  map[string]*ast.MappingValueNode
	order []string
	asked []string
}

// mapping opens a node as a mapping. A missing or wrong node is an error and
// gives an empty mapping.
func (d *decoder) mapping(n ast.Node, owner string) *fields {
	f := &fields{d: d, owner: owner, node: n, keys: map[string]*ast.MappingValueNode{}}
	var values []*ast.MappingValueNode
	switch m := n.(type) {
	case *ast.MappingNode:
		values = m.Values
	case *ast.MappingValueNode:
		values = []*ast.MappingValueNode{m}
	case *ast.NullNode:
	default:
		d.fail(n, "%s is %s; it must be a mapping of keys to values", owner, describe(n))
	}
	for _, v := range values {
		key := v.Key.GetToken().Value
		if f.keys[key] != nil {
			d.fail(v.Key, "the key '%s' of %s stands twice; keep one", key, owner)
		}
		f.keys[key] = v
		f.order = append(f.order, key)
	}
	return f
}

// describe names a node's value for an error.
func describe(n ast.Node) string {
	switch v := n.(type) {
	case nil, *ast.NullNode:
		return "empty"
	case *ast.MappingNode, *ast.MappingValueNode:
		return "a mapping"
	case *ast.SequenceNode:
		return "a list"
	case *ast.AnchorNode, *ast.AliasNode, *ast.TagNode:
		return "an anchor, alias or tag, which chains do not use"
	default:
		return strconv.Quote(v.GetToken().Value)
	}
}

// node returns a key's value; ok is false when the key is not there.
func (f *fields) get(key string) (n ast.Node, ok bool) {
	if !slices.Contains(f.asked, key) {
		f.asked = append(f.asked, key)
	}
	v := f.keys[key]
	if v == nil {
		return nil, false
	}
	return v.Value, true
}

// has tells whether a key is there, and that it may be.
func (f *fields) has(key string) bool {
	_, ok := f.get(key)
	return ok
}

// need is get for a key that must be there.
func (f *fields) need(key, example string) ast.Node {
	n, ok := f.get(key)
	if !ok {
		f.d.fail(f.node, "%s lacks '%s'; add %s: %s", f.owner, key, key, example)
		return nil
	}
	return n
}

// done complains of the first key that was never asked for.
func (f *fields) done() {
	for _, key := range f.order {
		if !slices.Contains(f.asked, key) {
			f.d.fail(f.keys[key].Key, "%s has no key '%s'; allowed are %s", f.owner, key, strings.Join(f.asked, ", "))
		}
	}
}

// text is a scalar as it was written.
func (d *decoder) text(n ast.Node, key string) string {
	switch n.(type) {
	case *ast.StringNode, *ast.IntegerNode, *ast.FloatNode, *ast.BoolNode, *ast.LiteralNode, *ast.InfinityNode, *ast.NanNode:
		return n.GetToken().Value
	case nil:
		return ""
	}
	d.fail(n, "'%s' is %s; it must be one value", key, describe(n))
	return ""
}

// quantity reads a value with a unit.
func (d *decoder) quantity(n ast.Node, key string, dim dimension) float64 {
	if n == nil || d.err != nil {
		return 0
	}
	v, err := dim.parse(d.text(n, key))
	if err != nil {
		d.fail(n, "'%s': %v", key, err)
	}
	return v
}

// list opens a node as a list.
func (d *decoder) list(n ast.Node, key string) []ast.Node {
	if n == nil {
		return nil
	}
	s, ok := n.(*ast.SequenceNode)
	if !ok {
		d.fail(n, "'%s' is %s; it must be a list", key, describe(n))
		return nil
	}
	return s.Values
}

// hz reads a frequency above zero.
func (f *fields) hz(key string) float64 {
	return f.d.hzOf(f.need(key, frequency.example), key)
}

func (d *decoder) hzOf(n ast.Node, key string) float64 {
	v := d.quantity(n, key, frequency)
	if d.err == nil && !(v > 0) {
		d.fail(n, "'%s' is %s; a frequency is above 0 Hz", key, describe(n))
	}
	return v
}

// hzPair reads [lo, hi], two rising frequencies.
func (f *fields) hzPair(key string) []float64 {
	n := f.need(key, "[300 Hz, 3400 Hz]")
	nodes := f.d.list(n, key)
	if f.d.err == nil && len(nodes) != 2 {
		f.d.fail(n, "'%s' has %d values; a band needs two edges such as [300 Hz, 3400 Hz]", key, len(nodes))
	}
	var out []float64
	for _, v := range nodes {
		out = append(out, f.d.hzOf(v, key))
	}
	if f.d.err == nil && !(out[0] < out[1]) {
		f.d.fail(n, "'%s' runs from %g Hz to %g Hz; the lower edge comes first", key, out[0], out[1])
	}
	return out
}

// db reads a level; positive demands one above 0 dB.
func (f *fields) db(key string, fallback float64, positive bool) float64 {
	n, ok := f.get(key)
	if !ok {
		if math.IsNaN(fallback) {
			f.need(key, level.example)
		}
		return fallback
	}
	v := f.d.quantity(n, key, level)
	if f.d.err == nil && positive && !(v > 0) {
		f.d.fail(n, "'%s' is %s; it must be above 0 dB", key, describe(n))
	}
	return v
}

// positive reads a plain number above zero, such as a q.
func (f *fields) positive(key string) float64 {
	n := f.need(key, "0.7")
	v := f.d.number(n, key)
	if f.d.err == nil && !(v > 0) {
		f.d.fail(n, "'%s' is %s; it must be above 0", key, describe(n))
	}
	return v
}

// number reads a plain number.
func (d *decoder) number(n ast.Node, key string) float64 {
	if n == nil || d.err != nil {
		return 0
	}
	v, unit, err := splitQuantity(d.text(n, key))
	switch {
	case err != nil:
		d.fail(n, "'%s' is %s; write a number", key, describe(n))
	case unit != "":
		d.fail(n, "'%s' is %s; it is a plain number, without a unit", key, describe(n))
	}
	return v
}

// whole reads a whole number from lo to hi.
func (d *decoder) whole(n ast.Node, key string, lo, hi int) int {
	v := d.number(n, key)
	if d.err == nil && n != nil && (v != math.Trunc(v) || v < float64(lo) || v > float64(hi)) {
		d.fail(n, "'%s' is %s; it is a whole number from %d to %d", key, describe(n), lo, hi)
	}
	return int(v)
}

// word reads one of a few words.
func (f *fields) word(key, fallback string, allowed ...string) string {
	n, ok := f.get(key)
	if !ok {
		return fallback
	}
	w := f.d.text(n, key)
	if !slices.Contains(allowed, w) {
		f.d.fail(n, "'%s' is %s; allowed are %s", key, describe(n), strings.Join(allowed, ", "))
	}
	return w
}
