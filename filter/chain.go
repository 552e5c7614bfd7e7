package filter

import (
	"crypto/sha256"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"strings"

	"github.com/goccy/go-yaml"
	"github.com/goccy/go-yaml/ast"
	"github.com/goccy/go-yaml/parser"
)

// Chain is a chain file, read and checked but not yet bound to a sample rate.
type Chain struct {
	File      string
	Name      string      // as given, or the file's name without its ending
	Phase     Realisation // of stages that do not say otherwise; Written: none given
	Tolerance float64     // dB that a realisation may stray from the target
	Stages    []*Stage
	Align     Align
	Edges     Edges

	// SHA256 is taken over the chain's text and the coefficient files it
	// names: what must be the same for an output to be the same.
	SHA256 [sha256.Size]byte

	files []string
}

// DefaultTolerance in dB, unless a chain says otherwise.
const DefaultTolerance = 0.1

// Edges says what stands before the first and after the last frame.
type Edges string

// Silence is zeros; Hold repeats the first and last frame; Mirror reflects the
// recording about its first and last frame, which are not repeated.
const (
	Silence Edges = "silence"
	Hold    Edges = "hold"
	Mirror  Edges = "mirror"
)

// AlignTo says which instant of the response is aligned with the input.
type AlignTo string

// AlignAuto is the bulk latency, AlignCentroid the centre of the response's
// energy, AlignNone leaves all latency in, AlignBy removes a given number.
const (
	AlignAuto     AlignTo = "auto"
	AlignCentroid AlignTo = "centroid"
	AlignNone     AlignTo = "none"
	AlignBy       AlignTo = "by"
)

// Align says what latency is removed.
type Align struct {
	To       AlignTo
	By       int  // samples, for AlignBy; negative moves the output later
	Fraction bool // also remove what is left below one sample
}

// Load reads a chain file. Errors are *ChainError, or of the file system.
func Load(path string) (*Chain, error) {
	raw, err := os.ReadFile(path)
	if err != nil {
		return nil, fmt.Errorf("the chain cannot be read: %w", err)
	}
	return Parse(raw, path)
}

// Parse reads a chain from text; file is its name in errors, and relative
// coefficient files are looked for beside it.
func Parse(text []byte, file string) (*Chain, error) {
	d := &decoder{file: file}
	tree, err := parser.ParseBytes(text, 0)
	if err != nil {
		return nil, syntaxError(file, err)
	}
	c := &Chain{File: file, Tolerance: DefaultTolerance, Edges: Silence, Align: Align{To: AlignAuto}}
	c.Name = strings.TrimSuffix(filepath.Base(file), filepath.Ext(file))
	var body ast.Node
	switch len(tree.Docs) {
	case 0:
	case 1:
		body = tree.Docs[0].Body
	default:
		return nil, &ChainError{File: file, Msg: "holds several YAML documents; a file is one chain"}
	}
	if body == nil {
		return nil, &ChainError{File: file, Msg: "is empty; a chain has at least 'stages'"}
	}
	c.read(d, body)
	if d.err != nil {
		return nil, d.err
	}
	return c, c.hash(text)
}

// syntaxError puts the YAML parser's complaint in the chain's own form.
func syntaxError(file string, err error) error {
	e := &ChainError{File: file, Msg: err.Error()}
	var s *yaml.SyntaxError
	if errors.As(err, &s) {
		e.Msg = "is not YAML here: " + s.Message
		e.Line, e.Column = s.Token.Position.Line, s.Token.Position.Column
	}
	return e
}

func (c *Chain) read(d *decoder, body ast.Node) {
	f := d.mapping(body, "a chain")
	if n, ok := f.get("name"); ok {
		c.Name = d.text(n, "name")
	}
	c.Phase = Realisation(f.word("phase", "", realisations...))
	c.Tolerance = f.db("tolerance", DefaultTolerance, true)
	for _, n := range d.list(f.need("stages", "[...]"), "stages") {
		if d.err != nil {
			return
		}
		c.Stages = append(c.Stages, c.readStage(d, n))
	}
	if n, ok := f.get("align"); ok {
		c.Align = d.align(n)
	}
	c.Edges = Edges(f.word("edges", string(Silence), string(Silence), string(Hold), string(Mirror)))
	f.done()
}

func (d *decoder) align(n ast.Node) Align {
	switch n.(type) {
	case *ast.MappingNode, *ast.MappingValueNode:
		f := d.mapping(n, "'align'")
		to, ok := f.get("to")
		if !ok {
			d.fail(n, "'align' lacks 'to'; add to: auto")
			return Align{}
		}
		a := d.alignWord(to)
		a.Fraction = f.word("fraction", "false", "true", "false") == "true"
		if a.Fraction && a.To != AlignAuto && a.To != AlignCentroid {
			d.fail(n, "'fraction' goes with to: auto or to: centroid")
		}
		f.done()
		return a
	}
	return d.alignWord(n)
}

func (d *decoder) alignWord(n ast.Node) Align {
	switch text := d.text(n, "align"); AlignTo(text) {
	case AlignAuto, AlignCentroid, AlignNone:
		return Align{To: AlignTo(text)}
	default:
		number, unit, err := splitQuantity(text)
		if err != nil || number != float64(int(number)) || unit != "" && unit != "samples" {
			d.fail(n, "'align' is %s; allowed are auto, centroid, none or a whole number of samples", describe(n))
		}
		return Align{To: AlignBy, By: int(number)}
	}
}

// hash covers everything that decides the output: the text and its files.
func (c *Chain) hash(text []byte) error {
	h := sha256.New()
	fmt.Fprintf(h, "chain %d\n%s", len(text), text)
	for _, path := range c.files {
		raw, err := os.ReadFile(path)
		if err != nil {
			return fmt.Errorf("%s: %w", c.File, err)
		}
		fmt.Fprintf(h, "file %d\n%s", len(raw), raw)
	}
	h.Sum(c.SHA256[:0])
	return nil
}
