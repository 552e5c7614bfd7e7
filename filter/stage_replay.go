package filter

import (
	"fmt"

	"fettle/filter/design"
	"fettle/filter/response"

	"github.com/goccy/go-yaml/ast"
)

// readReplay reads a replay curve, by its name or by its time constants.
func readReplay(f *fields, _ *Chain) func(float64) (plan, error) {
	var c design.ReplayCurve
	var err error
	var at ast.Node
	if f.oneOf("curve", "times", "riaa") == "times" {
		at = f.need("times", "[3180 us, 318 us, 75 us]")
		c, err = design.ReplayCurveOf(f.d.times(at))
	} else {
		at = f.need("curve", "riaa")
		c, err = design.ReplayCurveNamed(f.d.text(at, "curve"))
	}
	if err != nil {
		f.d.fail(at, "%v", err)
		c = design.ReplayCurve{}
	}
	inverse := f.word("inverse", "false", "true", "false") == "true"
	if inverse {
		c = c.Inverse()
	}
	return func(rate float64) (plan, error) {
		sections, worst, err := c.Sections(rate)
		if err != nil {
			return plan{}, err
		}
		p := curve(sections)
		p.half = func() ([]response.Section, error) {
			return nil, phaseError("half the decibels of a replay curve are no filter with few sections; use linear, or write phase: given at this stage to keep it")
		}
		p.notes = []string{replayNote(c, inverse, worst)}
		return p, nil
	}
}

func replayNote(c design.ReplayCurve, inverse bool, worst float64) string {
	note := fmt.Sprintf("replay: %s, within %.4f dB of the analogue curve", c.Description, worst)
	if inverse {
		note = "inverse " + note
	}
	if c.FromMemory {
		note += "; its time constants are from memory, not checked against the standard"
	}
	return note
}

// times reads time constants.
func (d *decoder) times(n ast.Node) []float64 {
	var out []float64
	for _, v := range d.list(n, "times", "[3180 us, 318 us, 75 us]") {
		out = append(out, d.quantity(v, "times", dimension{"time constant", duration.units, "75 us"}))
	}
	return out
}
