package choose

import (
	"bytes"
	"cmp"
	"fmt"
	"slices"
	"strings"

	"fettle/filter"

	"github.com/goccy/go-yaml/ast"
	"github.com/goccy/go-yaml/parser"
)

// phases says how a chain's stages shall be realised: Written leaves what the
// text has.
type phases struct {
	chain  filter.Realisation
	stages []filter.Realisation // one a stage
}

// rewrite sets phases in a chain's text and leaves all else as it stands; lines
// end in LF afterwards. The text must be one that filter.Parse takes.
func rewrite(text []byte, p phases) ([]byte, error) {
	text = bytes.TrimPrefix(text, []byte("\ufeff"))
	text = bytes.ReplaceAll(bytes.ReplaceAll(text, []byte("\r\n"), []byte("\n")), []byte("\r"), []byte("\n"))
	tree, err := parser.ParseBytes(text, 0)
	if err != nil {
		return nil, err
	}
	top := tree.Docs[0].Body
	var edits []edit
	set := func(mapping ast.Node, before string, to filter.Realisation) {
		if to != filter.Written {
			edits = append(edits, setPhase(mapping, before, to))
		}
	}
	set(top, "stages", p.chain)
	for i, item := range entry(top, "stages").Value.(*ast.SequenceNode).Values {
		set(entries(item)[0].Value, "", p.stages[i])
	}
	return apply(string(text), edits), nil
}

// entries are the keys of a mapping with their values.
func entries(n ast.Node) []*ast.MappingValueNode {
	switch m := n.(type) {
	case *ast.MappingNode:
		return m.Values
	case *ast.MappingValueNode:
		return []*ast.MappingValueNode{m}
	}
	return nil
}

// entry finds a key of a mapping; nil where it is not there.
func entry(mapping ast.Node, name string) *ast.MappingValueNode {
	keys := entries(mapping)
	i := slices.IndexFunc(keys, func(k *ast.MappingValueNode) bool { return k.Key.GetToken().Value == name })
	if i < 0 {
		return nil
	}
	return keys[i]
}

// edit puts text at a place (from 1) in lieu of so many characters.
type edit struct {
	line, column, drop int
	text               string
}

// setPhase changes the phase of a mapping, or writes one before a key of it;
// "": its first. In braces a comma parts the two, else each has a line.
func setPhase(mapping ast.Node, before string, to filter.Realisation) edit {
	if old := entry(mapping, "phase"); old != nil {
		value := old.Value.GetToken()
		length := len(value.Value)
		if strings.ContainsAny(value.Origin, `'"`) {
			length += 2
		}
		return edit{value.Position.Line, value.Position.Column, length, string(to)}
	}
	at := entries(mapping)[0]
	if before != "" {
		at = entry(mapping, before)
	}
	place := at.Key.GetToken().Position
	parting := "\n" + strings.Repeat(" ", place.Column-1)
	if m, ok := mapping.(*ast.MappingNode); ok && m.IsFlowStyle {
		parting = ", "
	}
	return edit{place.Line, place.Column, 0, "phase: " + string(to) + parting}
}

// apply makes edits from the last to the first, so that places stay true.
func apply(text string, edits []edit) []byte {
	lines := strings.SplitAfter(text, "\n")
	slices.SortFunc(edits, func(a, b edit) int {
		return cmp.Or(cmp.Compare(b.line, a.line), cmp.Compare(b.column, a.column))
	})
	for _, e := range edits {
		line := []rune(lines[e.line-1])
		lines[e.line-1] = string(line[:e.column-1]) + e.text + string(line[e.column-1+e.drop:])
	}
	return []byte(strings.Join(lines, ""))
}

// check makes sure that a text that was changed says what was meant.
func (p phases) check(c *filter.Chain) error {
	ok := len(c.Stages) == len(p.stages) && (p.chain == filter.Written || c.Phase == p.chain)
	for i := 0; ok && i < len(p.stages); i++ {
		ok = p.stages[i] == filter.Written || c.Stages[i].Phase == p.stages[i]
	}
	if !ok {
		return fmt.Errorf("%s: its text is too unusual to have phases written into it; lay it out as the README's examples are", c.File)
	}
	return nil
}

// rephased is a chain with other phases in its text.
func (c Chain) rephased(p phases) (Chain, error) {
	text, err := rewrite(c.Text, p)
	if err != nil {
		return Chain{}, fmt.Errorf("%s: its text cannot be changed: %w", c.File, err)
	}
	parsed, err := filter.Parse(text, c.File)
	if err != nil {
		return Chain{}, fmt.Errorf("with other phases written into it, %w", err)
	}
	return Chain{parsed, text}, p.check(parsed)
}
