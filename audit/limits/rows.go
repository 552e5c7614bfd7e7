package limits

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"fettle/audit/figures"
)

// Row is a verdict as text, for a table. Notes are whole sentences without a
// full stop, to be set under it.
type Row struct {
	Limit   string // its name
	Verdict string // "within", "exceeded", "exceeded (advice)", "not stated", "no published limit"
	Worst   string // "3.412 ms at 500 Hz"; "-" where nothing was judged
	Allowed string // "3.2 ms"; "-"
	Margin  string // "-0.212 ms"; "-"
	Notes   []string
}

// Rows gives verdicts as text, one row each.
func Rows(verdicts []Verdict) []Row {
	var out []Row
	for _, v := range verdicts {
		out = append(out, v.row())
	}
	return out
}

func (v Verdict) row() Row {
	r := Row{Limit: v.Name, Verdict: string(v.Outcome), Worst: "-", Allowed: "-", Margin: "-", Notes: v.notes()}
	if v.Outcome == Exceeded && !v.Fails() {
		r.Verdict += " (advice)"
	}
	if len(v.Points) == 0 {
		return r
	}
	r.Worst, r.Allowed = v.worst(), v.amount(v.Worst.Limit)
	if r.Margin = v.amount(v.Margin); v.Margin > 0 {
		r.Margin = "+" + r.Margin
	}
	return r
}

func (v Verdict) worst() string {
	p := v.Worst
	text := significant(p.Value)
	if p.Half > 0 {
		text += " ±" + strconv.FormatFloat(p.Half, 'g', 2, 64)
	}
	text += " " + v.Unit
	if v.level && p.Value <= figures.None {
		text = "none"
	}
	if p.Weights != "" {
		text += ", " + p.Weights
	}
	if !math.IsNaN(p.Hz) {
		text += fmt.Sprintf(" at %g Hz", p.Hz)
	}
	return text
}

func (v Verdict) amount(x float64) string { return significant(x) + " " + v.Unit }

// significant prints four significant digits, at most six after the point: a
// value just beyond its limit must not read as the limit.
func significant(x float64) string {
	digits := 6
	if a := math.Abs(x); a >= 1e-3 {
		digits = max(0, 3-int(math.Floor(math.Log10(a))))
	}
	text := strconv.FormatFloat(x, 'f', digits, 64)
	if strings.Contains(text, ".") {
		text = strings.TrimRight(strings.TrimRight(text, "0"), ".")
	}
	if text == "-0" {
		return "0"
	}
	return text
}

func (v Verdict) notes() []string {
	var notes []string
	if v.Reason != "" && v.Outcome == NotStated {
		notes = append(notes, "not stated: "+v.Reason+onBands(v.Unstated))
	} else if len(v.Unstated) > 0 {
		notes = append(notes, "not stated"+onBands(v.Unstated))
	}
	if len(v.Uncovered) > 0 {
		notes = append(notes, "no published limit"+onBands(v.Uncovered))
	}
	if len(v.Early) > 0 {
		notes = append(notes, "among these, bands that arrive early where only late ones have a limit"+onBands(v.Early))
	}
	if v.Status == FromMemory {
		notes = append(notes, "the figures of "+v.Source+" are from memory: advice, not a verdict")
	}
	return notes
}

// Silent says at which carried bands a set has no limit, such as " at 25 to 800 Hz"; "" if
// it has one at all of them.
func (v Verdict) Silent() string { return onBands(v.Uncovered) }

// onBands lists bands by their nominal frequencies, neighbours as one stretch.
func onBands(hz []float64) string {
	var parts []string
	for i := 0; i < len(hz); {
		j := i + 1
		for j < len(hz) && hz[j] < neighbour*hz[j-1] {
			j++
		}
		if j-i == 1 {
			parts = append(parts, fmt.Sprintf("%g", hz[i]))
		} else {
			parts = append(parts, fmt.Sprintf("%g to %g", hz[i], hz[j-1]))
		}
		i = j
	}
	if parts == nil {
		return ""
	}
	return " at " + strings.Join(parts, ", ") + " Hz"
}

// neighbour bounds the ratio of nominal frequencies a third of an octave apart,
// which goes up to 1.28, from that two thirds apart.
const neighbour = 1.4
