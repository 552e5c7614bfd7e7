package report

import (
	"fmt"
	"math"
	"strings"

	"fettle/audit"
	"fettle/audit/figures"
	"fettle/audit/limits"
)

// What is too small to be worth a word: a tenth of a millisecond and half a dB.
const (
	smallTime = 1e-4
	smallLoss = 0.5
)

// Words says in sentences what a result does to timing, whether its output may
// be mixed with the untreated, and which limit is nearest.
func Words(r *audit.Result) []string { return words(r.Figures, r.Verdicts) }

func words(f *figures.Figures, verdicts []limits.Verdict) []string {
	return wordsOf(f, nil, verdicts)
}

// wordsOf are those of figures that were measured with half widths errs.
func wordsOf(f, errs *figures.Figures, verdicts []limits.Verdict) []string {
	out := []string{timingWithin(f, errs), mixing(f)}
	if s := nearest(verdicts); s != "" {
		out = append(out, s)
	}
	return out
}

func timing(r *audit.Result) string { return timingOf(r.Figures) }

func timingOf(f *figures.Figures) string { return timingWithin(f, nil) }

func timingWithin(f, errs *figures.Figures) string {
	var s string
	switch last, first, ok := extremes(f.Bands); {
	case math.IsNaN(f.DelaySpread) || !ok:
		s = "How far its bands arrive apart is not stated"
	case errs != nil && !(errs.DelaySpread < max(f.DelaySpread/2, smallTime)):
		s = fmt.Sprintf("How far its bands arrive apart is known to ±%s only", milliseconds(errs.DelaySpread))
	case f.DelaySpread < smallTime:
		s = "All carried bands arrive together"
	default:
		s = fmt.Sprintf("The carried bands arrive up to %s apart, %s last and %s first", milliseconds(f.DelaySpread), hertz(last), hertz(first))
	}
	if math.IsNaN(f.Pink.Total) {
		return s + "."
	}
	s += fmt.Sprintf("; transients are smeared by %s", milliseconds(f.Pink.Total))
	if f.Pink.Phase >= smallTime {
		s += fmt.Sprintf(", %s of it by phase,", milliseconds(f.Pink.Phase))
	}
	return strings.TrimSuffix(s+ahead(f), ",") + "."
}

// ahead says how early it rings, by whichever weights show it longest.
func ahead(f *figures.Figures) string {
	early := math.Max(f.PreRing.White.Length, f.PreRing.Pink.Length)
	if math.IsNaN(early) {
		return ""
	}
	if early < smallTime {
		return " and do not ring before their time"
	}
	return fmt.Sprintf(" and ring up to %s before their time", milliseconds(early))
}

// extremes are the nominal frequencies of the carried bands that arrive last and
// first.
func extremes(bands []figures.BandFigures) (last, first float64, ok bool) {
	latest, earliest := math.Inf(-1), math.Inf(1)
	for _, b := range bands {
		if !b.Carried || math.IsNaN(b.Arrival) {
			continue
		}
		if b.Arrival > latest {
			latest, last = b.Arrival, b.Nominal
		}
		if b.Arrival < earliest {
			earliest, first = b.Arrival, b.Nominal
		}
		ok = true
	}
	return last, first, ok
}

func mixing(f *figures.Figures) string {
	switch {
	case math.IsNaN(f.SumTest):
		return "Whether the output may be mixed with the untreated original is not stated."
	case f.Polarity < 0:
		return "It inverts polarity: turn that round before mixing with the untreated original, which it would cancel."
	case f.SumTest > -smallLoss:
		return "The output may be mixed with the untreated original: no carried band is weakened by its timing."
	}
	return fmt.Sprintf("Mixed 1:1 with the untreated original, the output would cost a carried band up to %s dB: keep the two apart.", decimal(-f.SumTest, 1))
}

func nearest(verdicts []limits.Verdict) string {
	v, ok := limits.Nearest(verdicts)
	if !ok {
		return ""
	}
	row := limits.Rows([]limits.Verdict{v})[0]
	s := fmt.Sprintf("The nearest limit is %s: %s, with %s against %s", row.Limit, row.Verdict, row.Worst, row.Allowed)
	if silent := v.Silent(); silent != "" {
		s += "; it has none for the carried bands" + silent
	}
	return s + "."
}
