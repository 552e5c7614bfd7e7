package limits

import (
	"math"
	"slices"

	"fettle/audit/figures"
)

// stricter is said of every threshold of audibility.
const stricter = "Thresholds for clicks over headphones are stricter than for programme in a room, and fall further with practice."

// audible makes a set of thresholds for late and for early bands.
func audible(name, source string, late, early []row, help string) Limit {
	a := audibility{table{late, true}, table{early, true}}
	return Limit{
		Name: name, Source: source, Status: Published,
		Measure: "arrival less the median of the carried bands one to two octaves away",
		Range:   a.span(),
		Values:  a.values(),
		Between: "linear in ms over log frequency, which is not the source's",
		Help:    help + " " + stricter,
		unit:    "ms", judge: a.judge,
	}
}

type audibility struct{ late, early table }

func (a audibility) span() string {
	switch {
	case a.early.empty():
		return "late bands at " + a.late.span() + ", no early ones"
	case a.late.span() == a.early.span():
		return "late and early bands at " + a.late.span()
	}
	return "late bands at " + a.late.span() + ", early ones at " + a.early.span()
}

func (a audibility) values() string {
	if a.early.empty() {
		return "late: " + a.late.values()
	}
	return "late: " + a.late.values() + ". Early: " + a.early.values()
}

// onTime in seconds is too little to call a band late or early: the audit's own
// accuracy.
const onTime = 1e-6

func (a audibility) judge(s Subject, v *Verdict) {
	bands := s.carried()
	for _, b := range bands {
		if !a.covers(b.Band) {
			v.Uncovered = append(v.Uncovered, b.Nominal)
			continue
		}
		around, half, ok := median(b, bands)
		switch {
		case math.IsNaN(b.arrival):
			v.unstated(b.Band, s.reason(bandKey(b)))
		case !ok:
			v.unstated(b.Band, "no carried band one to two octaves away to compare with")
		default:
			a.judgeBand(b.Band, b.arrival-around, b.half+half, v)
		}
	}
}

func (a audibility) covers(b figures.Band) bool {
	_, late := a.late.at(b)
	_, early := a.early.at(b)
	return late || early
}

// judgeBand holds a deviation, in seconds, against the threshold of its sign.
// What may have either sign takes the one that has a threshold.
func (a audibility) judgeBand(b figures.Band, deviation, half float64, v *Verdict) {
	late, isLate := a.late.at(b)
	early, isEarly := a.early.at(b)
	either := math.Abs(deviation) <= max(onTime, half)
	p := Point{Hz: b.Nominal, Value: toMS * deviation, Half: toMS * half}
	switch {
	case isLate && (deviation >= 0 || either && !isEarly):
		p.Limit = toMS * late
	case isEarly && (deviation < 0 || either):
		p.Limit = -toMS * early
	default:
		v.Uncovered = append(v.Uncovered, b.Nominal)
		if isLate {
			v.Early = append(v.Early, b.Nominal)
		}
		return
	}
	v.Points = append(v.Points, p)
}

// Distances are counted between exact centres, which stand at whole thirds of an
// octave of base ten.
const (
	octave = 0.3 // lg of the ratio
	slack  = 1e-6
)

// median is that of the stated arrivals of the bands one to two octaves from b,
// and the most that the half widths of theirs can move it; ok is false where
// there are none.
func median(b timed, bands []timed) (seconds, half float64, ok bool) {
	var around []float64
	for _, o := range bands {
		away := math.Abs(math.Log10(o.Centre / b.Centre))
		if away < octave-slack || away > 2*octave+slack || math.IsNaN(o.arrival) {
			continue
		}
		around = append(around, o.arrival)
		half = max(half, o.half)
	}
	n := len(around)
	if n == 0 {
		return 0, 0, false
	}
	slices.Sort(around)
	return (around[(n-1)/2] + around[n/2]) / 2, half, true
}
