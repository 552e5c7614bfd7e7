package filter

import (
	"crypto/sha256"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"strings"

	"github.com/goccy/go-yaml/ast"
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
	Limits    []Limit // what the audit shall judge

	// SHA256 is taken over the chain's text and the coefficient files it
	// names: what must be the same for an output to be the same.
	SHA256 [sha256.Size]byte

	digests []byte // one SHA-256 for each coefficient file, as they were read
}

// DefaultTolerance in dB, unless a chain says otherwise, and the greatest that
// it may say: beyond it a -3 dB corner means nothing.
const (
	DefaultTolerance = 0.1
	MaxTolerance     = 3
)

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

// maxText in bytes bounds a chain file. Kernels worth more text than that
// belong in a file of their own.
const maxText = 1 << 20

// Load reads a chain file. Errors are *ChainError, or of the file system.
func Load(path string) (*Chain, error) {
	raw, err := readAtMost(path, maxText)
	if err != nil {
		return nil, fmt.Errorf("the chain cannot be read: %w", err)
	}
	return Parse(raw, path)
}

// readAtMost reads a file that has at most so many bytes.
func readAtMost(path string, most int64) ([]byte, error) {
	file, err := os.Open(path)
	if err != nil {
		return nil, err
	}
	defer file.Close()
	raw, err := io.ReadAll(io.LimitReader(file, most+1))
	if err == nil && int64(len(raw)) > most {
		err = fmt.Errorf("%s is longer than the %d bytes that such a file may have", path, most)
	}
	return raw, err
}

// Parse reads a chain from text, which is YAML in UTF-8 of at most 1 MiB. file
// is its name in errors, and relative coefficient files are looked for beside
// it. Errors are *ChainError: the first thing that is wrong, with its place.
func Parse(text []byte, file string) (*Chain, error) {
	d := &decoder{file: file}
	c := &Chain{File: file, Tolerance: DefaultTolerance, Edges: Silence, Align: Align{To: AlignAuto}}
	c.Name = strings.TrimSuffix(filepath.Base(file), filepath.Ext(file))
	if body := d.open(text); d.err == nil {
		c.read(d, body)
	}
	if d.err != nil {
		return nil, d.err
	}
	c.SHA256 = sha256.Sum256(fmt.Appendf(nil, "chain %d\n%s%s", len(text), text, c.digests))
	return c, nil
}

// Alone is the chain with only one of its stages, by index: for what that stage
// costs by itself.
func (c *Chain) Alone(stage int) *Chain {
	alone := *c
	alone.Stages, alone.Limits = c.Stages[stage:stage+1], nil
	return &alone
}

func (c *Chain) read(d *decoder, body ast.Node) {
	f := d.mapping(body, "a chain", body)
	if n, ok := f.get("name"); ok {
		c.Name = d.text(n, "name")
	}
	c.Phase = Realisation(f.word("phase", "", realisations...))
	c.Tolerance = f.positiveDB("tolerance", DefaultTolerance)
	if c.Tolerance > MaxTolerance {
		d.fail(f.keys["tolerance"].Value, "'tolerance' is %g dB; it is at most %d dB", c.Tolerance, MaxTolerance)
	}
	for _, n := range d.list(f.need("stages", "[gain: {by: -3 dB}]"), "stages", "[gain: {by: -3 dB}]") {
		if d.err != nil {
			return
		}
		c.Stages = append(c.Stages, c.readStage(d, n))
	}
	if n, ok := f.get("align"); ok {
		c.Align = d.align(n)
	}
	c.Edges = Edges(f.word("edges", string(Silence), string(Silence), string(Hold), string(Mirror)))
	c.Limits = d.limits(f)
	f.done()
}

func (d *decoder) align(n ast.Node) Align {
	switch n.(type) {
	case *ast.MappingNode, *ast.MappingValueNode:
	default:
		return d.alignWord(n)
	}
	f := d.mapping(n, "'align'", n)
	a := d.alignWord(f.need("to", "auto"))
	a.Fraction = f.word("fraction", "false", "true", "false") == "true"
	if a.Fraction && a.To != AlignAuto && a.To != AlignCentroid {
		d.fail(f.keys["fraction"].Value, "'fraction' goes with to: auto or to: centroid")
	}
	f.done()
	return a
}

func (d *decoder) alignWord(n ast.Node) Align {
	text := d.text(n, "align")
	switch to := AlignTo(text); to {
	case AlignAuto, AlignCentroid, AlignNone:
		return Align{To: to}
	}
	number, unit, err := splitQuantity(text)
	if err != nil || !isWhole(number, -maxShift, maxShift) || unit != "" && unit != "samples" {
		d.fail(n, "'align' is %s; allowed are auto, centroid, none, or a whole number of samples up to %d", describe(n), maxShift)
	}
	return Align{To: AlignBy, By: int(number)}
}
