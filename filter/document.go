package filter

import (
	"bytes"
	"fmt"
	"unicode/utf8"

	"github.com/goccy/go-yaml/ast"
	"github.com/goccy/go-yaml/lexer"
	"github.com/goccy/go-yaml/parser"
	"github.com/goccy/go-yaml/token"
)

// open parses text to its one YAML node.
func (d *decoder) open(text []byte) ast.Node {
	text = bytes.TrimPrefix(text, []byte("\ufeff"))
	// The lexer counts some lines that end in CR LF twice.
	text = bytes.ReplaceAll(bytes.ReplaceAll(text, []byte("\r\n"), []byte("\n")), []byte("\r"), []byte("\n"))
	switch {
	case bytes.HasPrefix(text, []byte("RIFF")), bytes.HasPrefix(text, []byte("RF64")):
		d.failAt(0, 0, "is a recording and not a chain; name a chain file")
	case len(text) > maxText:
		d.failAt(0, 0, "is longer than the %d bytes that a chain may have; put long kernels into files of their own", maxText)
	case !utf8.Valid(text):
		d.failAt(1+bytes.Count(validPart(text), []byte("\n")), 1, "this line is not UTF-8; save the chain as UTF-8 text")
	}
	if d.err != nil {
		return nil
	}
	tokens := lexer.Tokenize(string(text))
	if d.checkTokens(tokens); d.err != nil {
		return nil
	}
	tree, err := parser.Parse(tokens, 0, parser.AllowDuplicateMapKey())
	if err != nil {
		d.err = syntaxError(d.file, err)
		return nil
	}
	for _, doc := range tree.Docs {
		if doc.Body != nil {
			return doc.Body
		}
	}
	d.failAt(0, 0, "is empty; a chain has at least 'stages'")
	return nil
}

// validPart is text up to its first byte that is not UTF-8.
func validPart(text []byte) []byte {
	for i := 0; i < len(text); {
		r, size := utf8.DecodeRune(text[i:])
		if r == utf8.RuneError && size == 1 {
			return text[:i]
		}
		i += size
	}
	return text
}

// refused is what YAML has and a chain does not.
var refused = map[token.Type]string{
	token.AnchorType:     "an anchor",
	token.AliasType:      "an alias",
	token.TagType:        "a tag",
	token.MergeKeyType:   "a merge key",
	token.MappingKeyType: "an explicit key",
	token.DirectiveType:  "a directive",
}

// What no chain needs, and what the parser's work grows with the square of:
// deepest bounds nesting (a chain has 6 brackets in each other; a list in a
// column further right than 8 to a bracket is none), mostKeys all keys.
const (
	deepest  = 16
	mostKeys = 10000
)

// tokenCheck goes through a chain's tokens and refuses, before it costs
// anything, what no chain has.
type tokenCheck struct {
	depth, keys  int
	colon        int // the line of the last colon outside brackets
	begun, ended bool
	last         token.Type
}

func (d *decoder) checkTokens(tokens token.Tokens) {
	var c tokenCheck
	for _, t := range tokens {
		if t.Type == token.CommentType {
			continue
		}
		if wrong := c.take(t); wrong != "" {
			d.failAt(t.Position.Line, t.Position.Column, "%s", wrong)
			return
		}
		c.last = t.Type
	}
}

// take says what is wrong with the next token.
func (c *tokenCheck) take(t *token.Token) string {
	if what := refused[t.Type]; what != "" {
		return fmt.Sprintf("%s begins here, which chains do not use; write the value out, or put text that begins with %s in quotes", what, quote(t.Value))
	}
	if c.ended || c.begun && t.Type == token.DocumentHeaderType {
		return "a second YAML document begins here; a file is one chain"
	}
	if t.Type == token.DocumentEndType {
		c.ended = true
		return ""
	}
	c.begun = true
	switch t.Type {
	case token.SequenceStartType, token.MappingStartType:
		c.depth++
	case token.SequenceEndType, token.MappingEndType:
		c.depth--
	case token.MappingValueType:
		return c.takeColon(t.Position.Line)
	case token.CollectEntryType:
		if c.last == token.CollectEntryType || c.last == token.SequenceStartType || c.last == token.MappingStartType {
			return "no value stands before this comma; write one, or take the comma out"
		}
	}
	if c.depth > deepest || t.Type == token.SequenceEntryType && t.Position.Column > 8*deepest {
		return "is nested deeper here than any chain is"
	}
	return ""
}

func (c *tokenCheck) takeColon(line int) string {
	if c.keys++; c.keys > mostKeys {
		return fmt.Sprintf("there are more than %d keys; no chain needs so many", mostKeys)
	}
	if c.depth > 0 {
		return ""
	}
	if c.colon == line {
		return "a second ':' stands on this line; put braces round what belongs to one key, as in highpass: {at: 70 Hz, order: 4}"
	}
	c.colon = line
	return ""
}
