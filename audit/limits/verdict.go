package limits

import (
	"math"

	"fettle/audit/figures"
)

// Outcome is how a limit came out.
type Outcome string

// Within: everything judged keeps the limit. NoLimit: nothing that is carried
// lies in the table's range. NotStated: some figure that the limit needs is
// absent, or its interval reaches across the limit, and none exceeds it.
const (
	Within    Outcome = "within"
	Exceeded  Outcome = "exceeded"
	NotStated Outcome = "not stated"
	NoLimit   Outcome = "no published limit"
)

// Point is one value beside its limit, both in the verdict's unit.
type Point struct {
	Hz           float64 // the band's nominal frequency; NaN: the whole response
	Weights      string  // "white", "pink", or "" where there is no choice
	Value, Limit float64 // an early band's are negative
	Half         float64 // half width of the value's 95 % interval; 0: exact
}

// Verdict is what one limit says of one subject.
type Verdict struct {
	Name, Source string
	Status       Status
	Measure      string
	Unit         string // "ms", "dB" or "degrees"
	Outcome      Outcome
	Reason       string  // why Outcome is NotStated or NoLimit; "" otherwise
	Points       []Point // what was judged
	Worst        Point   // the one nearest to its limit, or furthest beyond; NaN if nothing was judged
	// Margin is how far Worst keeps clear of its limit, in Unit; negative when
	// it exceeds it, NaN if nothing was judged.
	Margin float64
	// Uncovered are the nominal frequencies, in Hz, of carried bands without a
	// published limit. Early are those of them that have one, but not for bands
	// that arrive early as they do.
	Uncovered, Early []float64
	// Unstated are those of carried bands that have a limit and cannot be judged.
	Unstated []float64

	level bool
}

// Fails tells whether the verdict makes a run fail. A table from memory gives
// advice: it never does.
func (v Verdict) Fails() bool { return v.Outcome == Exceeded && v.Status != FromMemory }

// Failed keeps the verdicts that fail.
func Failed(verdicts []Verdict) []Verdict {
	var out []Verdict
	for _, v := range verdicts {
		if v.Fails() {
			out = append(out, v)
		}
	}
	return out
}

// Used is how much of its limit the worst value takes up: 1 at the limit, more
// beyond it. It compares limits in different units; levels count as amplitudes.
// NaN if nothing was judged.
func (v Verdict) Used() float64 { return v.used(v.Worst) }

// Nearest is the verdict that takes up most of its limit; ok is false when
// nothing was judged.
func Nearest(verdicts []Verdict) (nearest Verdict, ok bool) {
	for _, v := range verdicts {
		if used := v.Used(); !math.IsNaN(used) && (!ok || used > nearest.Used()) {
			nearest, ok = v, true
		}
	}
	return nearest, ok
}

func (v *Verdict) used(p Point) float64 {
	switch {
	case v.level:
		return math.Pow(10, (p.Value-p.Limit)/20)
	case p.Value == 0 && p.Limit == 0:
		return 1
	}
	return math.Abs(p.Value) / math.Abs(p.Limit)
}

// marginOf is how far a point keeps from its limit, in the verdict's unit.
func (v *Verdict) marginOf(p Point) float64 {
	if v.level {
		return p.Limit - p.Value
	}
	return math.Abs(p.Limit) - math.Abs(p.Value)
}

// unstated notes that a limit needs a figure that is absent.
func (v *Verdict) unstated(b figures.Band, why string) {
	v.Unstated = append(v.Unstated, b.Nominal)
	if v.Reason == "" {
		v.Reason = why
	}
}

// conclude draws the outcome from what was judged.
func (v *Verdict) conclude() {
	nan := math.NaN()
	v.Worst, v.Margin = Point{Hz: nan, Value: nan, Limit: nan, Half: nan}, nan
	exceeded, across := false, false
	for i, p := range v.Points {
		if i == 0 || v.used(p) > v.used(v.Worst) {
			v.Worst, v.Margin = p, v.marginOf(p)
		}
		within, beyond := v.marginOf(p)-p.Half >= 0, v.marginOf(p)+p.Half < 0
		exceeded = exceeded || beyond
		across = across || !within && !beyond
	}
	switch {
	case exceeded:
		v.Outcome, v.Reason = Exceeded, ""
	case v.Reason != "":
		v.Outcome = NotStated
	case across:
		v.Outcome, v.Reason = NotStated, "the 95 % interval of what was measured reaches across the limit"
	case len(v.Points) > 0:
		v.Outcome = Within
	case len(v.Uncovered) > 0:
		v.Outcome, v.Reason = NoLimit, "the table says nothing of what is carried"
	default:
		v.Outcome, v.Reason = NotStated, "no band is carried"
	}
}
