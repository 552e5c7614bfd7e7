package filter

import (
	"fmt"
	"slices"
	"strings"

	"github.com/goccy/go-yaml/ast"
)

// decoder reads one chain file. It keeps the first error and goes on with
// zero values, so that reading code need not check at every step.
type decoder struct {
	file    string
	err     *ChainError
	highest float64 // of the frequencies of the stage being read, in Hz
}

// fail keeps an error at a node, unless there is one already.
func (d *decoder) fail(n ast.Node, format string, args ...any) {
	line, column := position(n)
	d.failAt(line, column, format, args...)
}

func (d *decoder) failAt(line, column int, format string, args ...any) {
	if d.err == nil {
		d.err = &ChainError{d.file, line, column, fmt.Sprintf(format, args...)}
	}
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
	if n == nil || n.GetToken() == nil {
		return 0, 0
	}
	p := n.GetToken().Position
	return p.Line, p.Column
}

// fields is one mapping: every key asked for is one that may stand there, and
// done complains of the rest.
type fields struct {
	d       *decoder
	owner   string   // what the mapping describes: "a chain", "stage bell"
	at      ast.Node // where it stands
	keys    map[string]*ast.MappingValueNode
	order   []string
	asked   []string
	missing *ChainError // a key that was needed
}

// mapping opens a node as a mapping that stands at another node. A wrong node
// is an error and gives an empty mapping, as does an empty one.
func (d *decoder) mapping(n ast.Node, owner string, at ast.Node) *fields {
	f := &fields{d: d, owner: owner, at: at, keys: map[string]*ast.MappingValueNode{}}
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
		key, ok := scalar(v.Key)
		switch {
		case !ok:
			d.fail(v.Key, "a key of %s is %s; keys are words", owner, describe(v.Key))
		case f.keys[key] != nil:
			d.fail(v.Key, "the key %s of %s stands twice; keep one", quote(key), owner)
		}
		f.keys[key] = v
		f.order = append(f.order, key)
	}
	return f
}

// scalar is a single value as text; a block of text ends without its line end.
func scalar(n ast.Node) (text string, ok bool) {
	switch v := n.(type) {
	case *ast.StringNode:
		return v.Value, true
	case *ast.LiteralNode:
		return strings.TrimSuffix(v.Value.Value, "\n"), true
	case *ast.IntegerNode, *ast.FloatNode, *ast.BoolNode, *ast.InfinityNode, *ast.NanNode:
		return n.GetToken().Value, true
	}
	return "", false
}

// describe names a node's value for an error.
func describe(n ast.Node) string {
	switch n.(type) {
	case *ast.MappingNode, *ast.MappingValueNode:
		return "a mapping"
	case *ast.SequenceNode:
		return "a list"
	}
	if text, ok := scalar(n); ok {
		return quote(text)
	}
	return "empty"
}

// get returns a key's value; ok is false when the key is not there. A key
// without a value is an error.
func (f *fields) get(key string) (n ast.Node, ok bool) {
	if !slices.Contains(f.asked, key) {
		f.asked = append(f.asked, key)
	}
	v := f.keys[key]
	if v == nil {
		return nil, false
	}
	if _, empty := v.Value.(*ast.NullNode); empty {
		f.d.fail(v.Key, "'%s' is empty; give it a value, or leave the key out", key)
		return nil, true
	}
	return v.Value, true
}

// need is get for a key that must be there.
func (f *fields) need(key, example string) ast.Node {
	n, ok := f.get(key)
	if !ok {
		f.lack("%s lacks '%s'; add for instance %s: %s", f.owner, key, key, example)
	}
	return n
}

func (f *fields) lack(format string, args ...any) {
	if f.d.err == nil {
		f.d.fail(f.at, format, args...)
		f.missing = f.d.err
	}
}

// either returns which of two keys is there, "" for neither; both is an error.
func (f *fields) either(a, b string) string {
	_, first := f.get(a)
	_, second := f.get(b)
	switch {
	case first && second:
		f.d.fail(f.keys[b].Key, "'%s' and '%s' of %s exclude each other; keep one", a, b, f.owner)
	case second:
		return b
	case !first:
		return ""
	}
	return a
}

// oneOf is either where one must be there.
func (f *fields) oneOf(a, b, example string) string {
	key := f.either(a, b)
	if key == "" {
		f.lack("%s lacks '%s' or '%s'; add one of them, for instance %s: %s", f.owner, a, b, a, example)
	}
	return key
}

// done complains of the first key that was never asked for. It goes before a
// missing key: most likely it is that one, misspelt.
func (f *fields) done() {
	for _, key := range f.order {
		if slices.Contains(f.asked, key) {
			continue
		}
		if f.d.err == f.missing {
			f.d.err = nil
		}
		f.d.fail(f.keys[key].Key, "%s has no key %s; allowed are %s", f.owner, quote(key), strings.Join(f.asked, ", "))
	}
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
