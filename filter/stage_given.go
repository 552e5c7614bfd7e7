package filter

import (
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"

	"fettle/audio"
	"fettle/filter/response"

	"github.com/goccy/go-yaml/ast"
)

// readFIR reads taps from the chain or from a text, JSON or WAV file.
func readFIR(f *fields, c *Chain) func(float64) (plan, error) {
	var taps []float64
	if n, ok := f.get("taps"); ok {
		taps = f.d.numbers(n, "taps")
	} else if name, path := c.coefficientFile(f, "taps"); path != "" {
		taps = readFile(f.d, name, path, tapsFromText, tapsFromJSON, tapsFromWAV)
	}
	if f.d.err == nil && len(taps) == 0 {
		f.d.fail(f.node, "%s has no taps", f.owner)
	}
	return func(float64) (plan, error) { return plan{gain: 1, taps: taps}, nil }
}

// readBiquads reads rows of b0 b1 b2 a0 a1 a2.
func readBiquads(f *fields, c *Chain) func(float64) (plan, error) {
	var rows [][]float64
	n, inline := f.get("sections")
	if inline {
		for _, row := range f.d.list(n, "sections") {
			rows = append(rows, f.d.numbers(row, "sections"))
		}
	} else if name, path := c.coefficientFile(f, "sections"); path != "" {
		n = name
		rows = readFile(f.d, name, path, rowsFromText, rowsFromJSON, nil)
	}
	sections := make([]response.Section, 0, len(rows))
	for i, row := range rows {
		s, err := sectionOf(row)
		if err != nil {
			f.d.fail(n, "section %d of %s: %v", i+1, f.owner, err)
			break
		}
		sections = append(sections, s)
	}
	if f.d.err == nil && len(sections) == 0 {
		f.d.fail(f.node, "%s has no sections", f.owner)
	}
	return func(float64) (plan, error) { return curve(sections), nil }
}

// sectionOf normalises b0 b1 b2 a0 a1 a2 and refuses an unstable section.
func sectionOf(row []float64) (response.Section, error) {
	if len(row) != 6 {
		return response.Section{}, fmt.Errorf("has %d numbers; it needs six: b0 b1 b2 a0 a1 a2", len(row))
	}
	a0 := row[3]
	if a0 == 0 {
		return response.Section{}, errors.New("a0 is 0; it must not be")
	}
	s := response.Section{B0: row[0] / a0, B1: row[1] / a0, B2: row[2] / a0, A1: row[4] / a0, A2: row[5] / a0}
	if !response.Stable([]response.Section{s}) {
		return s, errors.New("is unstable: a pole lies on or outside the unit circle; check the signs of a1 and a2")
	}
	return s, nil
}

// coefficientFile reads the file key; path is relative to the chain's file.
func (c *Chain) coefficientFile(f *fields, inline string) (n ast.Node, path string) {
	n, ok := f.get("file")
	if !ok {
		f.d.fail(f.node, "%s lacks '%s' or 'file'; add one of them", f.owner, inline)
		return nil, ""
	}
	path = f.d.text(n, "file")
	if path != "" && !filepath.IsAbs(path) {
		path = filepath.Join(filepath.Dir(c.File), path)
	}
	c.files = append(c.files, path)
	return n, path
}

// numbers reads a list of plain numbers.
func (d *decoder) numbers(n ast.Node, key string) []float64 {
	var out []float64
	for _, v := range d.list(n, key) {
		out = append(out, d.number(v, key))
	}
	return out
}

// readFile reads coefficients by the file's ending.
func readFile[T any](d *decoder, n ast.Node, path string, text, object, wav func(string) (T, error)) T {
	read := text
	switch strings.ToLower(filepath.Ext(path)) {
	case ".json":
		read = object
	case ".wav":
		read = wav
	}
	var out T
	if read == nil {
		d.fail(n, "'file' is %s; these coefficients come from text or JSON", describe(n))
		return out
	}
	out, err := read(path)
	if err != nil {
		d.fail(n, "'file': %v", err)
	}
	return out
}

// rowsFromText reads a line of numbers a row, parted by blanks, commas or
// semicolons; what follows # is a remark.
func rowsFromText(path string) ([][]float64, error) {
	raw, err := os.ReadFile(path)
	if err != nil {
		return nil, err
	}
	var rows [][]float64
	for i, line := range strings.Split(string(raw), "\n") {
		line, _, _ = strings.Cut(line, "#")
		var row []float64
		for _, word := range strings.FieldsFunc(line, func(r rune) bool { return strings.ContainsRune(" \t\r,;", r) }) {
			v, err := strconv.ParseFloat(word, 64)
			if err != nil || math.IsNaN(v) || math.IsInf(v, 0) {
				return nil, fmt.Errorf("%s:%d: %q is not a finite number", path, i+1, word)
			}
			row = append(row, v)
		}
		if row != nil {
			rows = append(rows, row)
		}
	}
	return rows, nil
}

func tapsFromText(path string) ([]float64, error) {
	rows, err := rowsFromText(path)
	var taps []float64
	for _, row := range rows {
		taps = append(taps, row...)
	}
	return taps, err
}

func rowsFromJSON(path string) ([][]float64, error) {
	return fromJSON(path, func(o coefficientObject) [][]float64 { return o.Sections })
}

func tapsFromJSON(path string) ([]float64, error) {
	return fromJSON(path, func(o coefficientObject) []float64 { return o.Taps })
}

type coefficientObject struct {
	Taps     []float64   `json:"taps"`
	Sections [][]float64 `json:"sections"`
}

// fromJSON reads a bare array, or an object with the array under its name.
func fromJSON[T any](path string, pick func(coefficientObject) T) (T, error) {
	var bare T
	raw, err := os.ReadFile(path)
	if err != nil {
		return bare, err
	}
	if json.Unmarshal(raw, &bare) == nil {
		return bare, nil
	}
	var o coefficientObject
	if err := json.Unmarshal(raw, &o); err != nil {
		return bare, fmt.Errorf("%s: %w", path, err)
	}
	return pick(o), nil
}

// maxWAVTaps bounds a kernel read from a recording: a recording given by
// mistake must not become one.
const maxWAVTaps = 1 << 22

func tapsFromWAV(path string) ([]float64, error) {
	r, err := audio.Open(path)
	if err != nil {
		return nil, err
	}
	defer r.Close()
	if n := r.Format().NumChannels; n != 1 {
		return nil, fmt.Errorf("%s has %d channels; an impulse response for a fir stage has 1", path, n)
	}
	if n := r.Frames(); n > maxWAVTaps {
		return nil, fmt.Errorf("%s has %d frames; a kernel has at most %d taps", path, n, maxWAVTaps)
	}
	taps := make([]float64, r.Frames())
	for done := 0; done < len(taps); {
		n, err := r.ReadFrames(taps[done:])
		if err != nil {
			if err == io.EOF {
				err = io.ErrUnexpectedEOF
			}
			return nil, err
		}
		done += n
	}
	return taps, nil
}
