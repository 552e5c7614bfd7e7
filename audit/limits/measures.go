package limits

import (
	"fmt"
	"math"
	"strings"

	"fettle/audit/figures"
	"fettle/filter"
)

// Measure is something that a user may bound.
type Measure struct {
	Name    string
	Example string // of a bound: "-60 dB beyond 5 ms"
	Help    string

	forms []form // by unit
}

// form is how a measure is bounded in one unit.
type form struct {
	unit     string // "ms", "dB" or "degrees"
	least    float64
	most     float64 // of a bound, in unit
	level    bool    // see Limit
	beyond   bool    // a bound may say beyond what time
	weighted bool    // and under which weights
	measure  string
	read     func(b filter.Bound) []reading
}

// The widest bounds: beyond them nothing is bounded.
const (
	longest     = 60e3    // ms
	longestSpan = 1 << 24 // samples: 87 s at 192 kHz
	deepest     = figures.None
	widest      = 36000 // degrees, phase being unwrapped
)

// measures are what a user may bound.
var measures = []Measure{
	ring(preRing),
	ring(postRing),
	{"smear", "2 ms", "RMS duration", []form{{
		unit: "ms", most: longest, weighted: true, measure: "smear",
		read: func(b filter.Bound) []reading {
			return smear(b.Weights, "total", func(m figures.Smear) float64 { return m.Total })
		},
	}}},
	{"phase-share", "1 ms", "the part of smear that phase adds", []form{{
		unit: "ms", most: longest, weighted: true, measure: "phase share of the smear",
		read: func(b filter.Bound) []reading {
			return smear(b.Weights, "phase", func(m figures.Smear) float64 { return m.Phase })
		},
	}}},
	single("delay-spread", "2 ms", "latest less earliest arrival of the carried bands",
		form{unit: "ms", most: longest, measure: "delay spread"},
		of("delay_spread", func(f *figures.Figures) float64 { return f.DelaySpread }).
			decidedBy(worstBy(func(b timed) float64 { return math.Abs(b.arrival) }))),
	single("phase-deviation", "10 degrees", "mean absolute phase of the worst carried band",
		form{unit: "degrees", most: widest, measure: "phase deviation"},
		of("phase_deviation", func(f *figures.Figures) float64 { return f.PhaseDeviation }).
			decidedBy(worstBy(func(b timed) float64 { return b.phase }))),
	single("latency", "5 ms", "what must be looked ahead and what latency is left, without delay stages",
		form{unit: "ms", most: longest, measure: "wait when it runs as the sound comes in"},
		reading{key: "latency_samples", get: func(s Subject) (value, half float64) {
			return s.Latency / s.Rate, known(s.LatencyError) / s.Rate
		}}),
	single("lead", "5 ms", "how long before the aligned instant early energy exceeds -60 dB",
		form{unit: "ms", most: longest, measure: "energy ahead of the aligned instant"},
		of("lead_ms", func(f *figures.Figures) float64 { return f.Lead })),
	single("sum-test", "-3 dB", "deepest loss when mixed 1:1 with the untreated original",
		form{unit: "dB", least: deepest, measure: "loss when mixed with the untreated"},
		of("sum_test", func(f *figures.Figures) float64 { return f.SumTest })),
	single("target-error", "0.1 dB", "how far the magnitude strays from the chain's target",
		form{unit: "dB", most: -deepest, measure: "error against the target magnitude"},
		reading{key: "target_error_db", get: func(s Subject) (value, half float64) { return s.TargetError, 0 }}),
}

// Measures lists what a user may bound.
func Measures() []Measure { return append([]Measure(nil), measures...) }

func measureNames() string {
	var names []string
	for _, m := range measures {
		names = append(names, m.Name)
	}
	return strings.Join(names, ", ")
}

// single is a measure of one figure.
func single(name, example, help string, f form, r reading) Measure {
	f.read = func(filter.Bound) []reading { return []reading{r} }
	return Measure{name, example, help, []form{f}}
}

// ring is early or late energy, as a level or as a length.
func ring(r ringOf) Measure {
	return Measure{r.name, "-60 dB beyond 5 ms", r.sort + " energy outside the main lobe or beyond 2, 5 or 20 ms in dB, or its time to -60 dB", []form{
		{
			unit: "dB", least: deepest, level: true, beyond: true, weighted: true, measure: r.sort + " energy outside the main lobe",
			read: func(b filter.Bound) []reading {
				if i := beyondIndex(b.Beyond); i >= 0 {
					return r.beyond(i, b.Weights)
				}
				return r.level(b.Weights)
			},
		},
		{
			unit: "ms", most: longest, weighted: true, measure: r.lengthMeasure(),
			read: func(b filter.Bound) []reading { return r.length(b.Weights) },
		},
	}}
}

// beyondIndex finds a time in s among those at which energy is stated; -1: none.
func beyondIndex(seconds float64) int {
	for i, t := range figures.BeyondTimes {
		if math.Abs(seconds-t) <= 1e-9 {
			return i
		}
	}
	return -1
}

// bounded makes a limit of a measure and its bound, or says why it cannot.
func (m Measure) bounded(r filter.Limit) (Limit, error) {
	b := r.Bound
	f, amount, ok := m.formFor(b)
	switch {
	case !ok:
		return Limit{}, r.RefuseValue("%q bounds %s, which is in %s; write for instance %s", r.Value, m.Name, m.units(), m.Example)
	case b.Beyond > 0 && !f.beyond:
		return Limit{}, r.RefuseValue("%q: 'beyond' goes with %s and %s in dB only", r.Value, preRing.name, postRing.name)
	case b.Beyond > 0 && beyondIndex(b.Beyond) < 0:
		return Limit{}, r.RefuseValue("%q: energy is stated beyond 2, 5 and 20 ms; for its time to -60 dB bound %s in ms", r.Value, m.Name)
	case b.Weights != both && !f.weighted:
		return Limit{}, r.RefuseValue("%q: %s knows no weights; leave %q out", r.Value, m.Name, b.Weights)
	case b.Unit == filter.Samples && !(amount >= 0 && amount <= longestSpan):
		return Limit{}, r.RefuseValue("%q: a bound on %s lies between 0 and %d samples", r.Value, m.Name, longestSpan)
	case b.Unit != filter.Samples && !(amount >= f.least && amount <= f.most):
		return Limit{}, r.RefuseValue("%q: a bound on %s lies between %g and %g %s", r.Value, m.Name, f.least, f.most, f.unit)
	}
	return Limit{
		Name: m.Name + " " + r.Value, Source: r.Where(), Status: Own, Measure: f.measureAt(b), Help: m.Help,
		unit: f.unit, level: f.level, judge: judgeReadings(f.read(b), f.scale(), limitOf(b, amount)),
	}, nil
}

// formFor finds the form that a bound's unit asks for, and the amount in the
// form's unit; samples are left for when a rate is known.
func (m Measure) formFor(b filter.Bound) (f form, amount float64, ok bool) {
	unit, amount := string(b.Unit), b.Amount
	switch b.Unit {
	case filter.Seconds:
		unit, amount = "ms", toMS*b.Amount
	case filter.Samples:
		unit = "ms"
	}
	for _, f := range m.forms {
		if f.unit == unit {
			return f, amount, true
		}
	}
	return form{}, 0, false
}

// limitOf is a bound in the form's unit at a rate in Hz.
func limitOf(b filter.Bound, amount float64) func(rate float64) float64 {
	if b.Unit == filter.Samples {
		return func(rate float64) float64 { return toMS * amount / rate }
	}
	return func(float64) float64 { return amount }
}

func (f form) scale() float64 {
	if f.unit == "ms" {
		return toMS
	}
	return 1
}

func (f form) measureAt(b filter.Bound) string {
	if b.Beyond > 0 {
		return fmt.Sprintf("%s beyond %g ms", strings.TrimSuffix(f.measure, " outside the main lobe"), toMS*b.Beyond)
	}
	return f.measure
}

// units names the units that a bound may be in.
func (m Measure) units() string {
	var units []string
	for _, f := range m.forms {
		units = append(units, f.unit)
	}
	return strings.Join(units, " or ")
}
