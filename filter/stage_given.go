package filter

import (
	"errors"
	"fmt"
	"math"
	"slices"

	"fettle/audio"
	"fettle/filter/design"
	"fettle/filter/response"

	"github.com/goccy/go-yaml/ast"
)

// readFIR reads taps from the chain or from a text, JSON or WAV file.
func readFIR(f *fields, c *Chain) func(float64) (plan, error) {
	const example = "[0.25, 0.5, 0.25]"
	var taps []float64
	var made madeAt
	if f.oneOf("taps", "file", example) == "file" {
		n, path := c.coefficientFile(f)
		taps = readFile(c, f.d, n, path, formats[[]float64]{noting(&made, tapsFromText), noting(&made, tapsFromJSON), func(r *audio.Recording) ([]float64, error) {
			made = madeAt(r.Format().SampleRate)
			return tapsFromWAV(r)
		}})
	} else {
		taps = f.d.numbers(f.need("taps", example), "taps", example)
	}
	if err := checkTaps(taps); err != nil {
		f.d.fail(f.at, "%s: %v", f.owner, err)
	}
	return func(rate float64) (plan, error) {
		return plan{gain: 1, taps: taps}, made.check(rate)
	}
}

func checkTaps(taps []float64) error {
	switch {
	case len(taps) == 0:
		return errors.New("has no taps; a kernel has at least one")
	case len(taps) > design.MaxTaps:
		return fmt.Errorf("has %d taps; a kernel has at most %d", len(taps), design.MaxTaps)
	case !slices.ContainsFunc(taps, func(v float64) bool { return v != 0 }):
		return errors.New("has taps of 0 only, which would silence the recording")
	case slices.ContainsFunc(taps, func(v float64) bool { return !(math.Abs(v) <= maxCoefficient) }):
		return fmt.Errorf("has a tap that is no number between -%.0e and %.0e", maxCoefficient, maxCoefficient)
	}
	return nil
}

// maxCoefficient bounds what is given by coefficients, so that products of a
// few stages stay within range: 200 dB.
const maxCoefficient = 1e10

// readBiquads reads rows of b0 b1 b2 a0 a1 a2.
func readBiquads(f *fields, c *Chain) func(float64) (plan, error) {
	const example = "[[1, 0, 0, 1, -0.5, 0]]"
	var sections []response.Section
	var made madeAt
	if f.oneOf("sections", "file", example) == "file" {
		n, path := c.coefficientFile(f)
		sections = readFile(c, f.d, n, path, formats[[]response.Section]{text: noting(&made, sectionsFromText), json: noting(&made, sectionsFromJSON)})
	} else {
		sections = f.inlineSections(f.need("sections", example), example)
	}
	if len(sections) == 0 {
		f.d.fail(f.at, "%s has no sections; it needs at least one", f.owner)
	}
	return func(rate float64) (plan, error) { return curve(sections), made.check(rate) }
}

func (f *fields) inlineSections(n ast.Node, example string) []response.Section {
	var out []response.Section
	for i, row := range f.d.list(n, "sections", example) {
		numbers := f.d.numbers(row, "sections", example)
		if f.d.err != nil {
			return nil
		}
		s, err := sectionOf(numbers)
		if err != nil {
			f.d.fail(row, "section %d of %s %v", i+1, f.owner, err)
		}
		out = append(out, s)
	}
	return out
}

// sectionOf normalises b0 b1 b2 a0 a1 a2. The errors go on from "the section".
func sectionOf(row []float64) (response.Section, error) {
	if len(row) != 6 {
		return response.Section{}, fmt.Errorf("has %d numbers; it needs six: b0 b1 b2 a0 a1 a2", len(row))
	}
	a0 := row[3]
	if a0 == 0 {
		return response.Section{}, errors.New("has an a0 of 0; all others are divided by it, so it must not be 0")
	}
	for i, v := range row {
		row[i] = v / a0
		if !(math.Abs(row[i]) <= maxCoefficient) {
			return response.Section{}, fmt.Errorf("has %g over an a0 of %g; no coefficient is beyond %.0e", v, a0, maxCoefficient)
		}
	}
	s := response.Section{B0: row[0], B1: row[1], B2: row[2], A1: row[4], A2: row[5]}
	if !response.Stable([]response.Section{s}) {
		return s, errors.New("is unstable: a pole lies on or outside the unit circle; check the signs of a1 and a2")
	}
	if err := checkRing([]response.Section{s}); err != nil {
		return s, fmt.Errorf("has a pole too near the unit circle: it would ring for more than %d samples", longestRing)
	}
	return s, nil
}
