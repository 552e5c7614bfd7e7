package limits

import (
	"fmt"
	"math"
	"strings"

	"fettle/audit/figures"
)

// row is a limit of most seconds, either way, from one frequency to another in
// Hz; a point where the two are equal.
type row struct{ from, to, most float64 }

// points makes rows of pairs of frequency in Hz and limit in ms.
func points(pairs ...[2]float64) []row {
	var rows []row
	for _, p := range pairs {
		rows = append(rows, row{p[0], p[0], p[1] / toMS})
	}
	return rows
}

// flat makes points of one limit in ms.
func flat(ms float64, hz ...float64) []row {
	var rows []row
	for _, f := range hz {
		rows = append(rows, row{f, f, ms / toMS})
	}
	return rows
}

// steps makes rows of from, to in Hz and limit in ms.
func steps(triples ...[3]float64) []row {
	var rows []row
	for _, t := range triples {
		rows = append(rows, row{t[0], t[1], t[2] / toMS})
	}
	return rows
}

const toMS = 1e3

// table is a limit over frequency, its rows rising.
type table struct {
	rows []row
	// ramp: the rows are points, joined by lines in time over log frequency.
	// Otherwise each row stands alone.
	ramp bool
}

// empty: the study has no thresholds of this kind.
func (t table) empty() bool { return len(t.rows) == 0 }

func (t table) from() float64 { return t.rows[0].from }
func (t table) to() float64   { return t.rows[len(t.rows)-1].to }

// holds tells whether a band has a frequency from lo to hi.
func holds(b figures.Band, lo, hi float64) bool { return b.Lower <= hi && lo < b.Upper }

// at is the limit in seconds for a band; ok is false when the table has none.
func (t table) at(b figures.Band) (seconds float64, ok bool) {
	switch {
	case t.empty() || !holds(b, t.from(), t.to()):
		return 0, false
	case t.ramp:
		return t.ramped(clamp(b.Centre, t.from(), t.to())), true
	}
	nearest := math.Inf(1)
	for _, r := range t.rows {
		if !holds(b, r.from, r.to) {
			continue
		}
		distance := math.Abs(math.Log(b.Centre / clamp(b.Centre, r.from, r.to)))
		if distance < nearest || distance == nearest && r.most < seconds {
			nearest, seconds, ok = distance, r.most, true
		}
	}
	return seconds, ok
}

func clamp(f, lo, hi float64) float64 { return min(max(f, lo), hi) }

// ramped reads the line between the points on either side of a frequency of the table.
func (t table) ramped(hz float64) float64 {
	for i, r := range t.rows[1:] {
		if before := t.rows[i]; hz <= r.from {
			share := math.Log(hz/before.from) / math.Log(r.from/before.from)
			return before.most + share*(r.most-before.most)
		}
	}
	return t.rows[len(t.rows)-1].most
}

// span says where the table reaches.
func (t table) span() string {
	if t.from() == t.to() {
		return fmt.Sprintf("%g Hz", t.from())
	}
	return fmt.Sprintf("%g to %g Hz", t.from(), t.to())
}

// values lists the limits, neighbours of one value together.
func (t table) values() string {
	var parts []string
	for i := 0; i < len(t.rows); {
		j, places := i, []string{}
		for ; j < len(t.rows) && t.rows[j].most == t.rows[i].most; j++ {
			place := fmt.Sprintf("%g", t.rows[j].from)
			if t.rows[j].to != t.rows[j].from {
				place += fmt.Sprintf(" to %g", t.rows[j].to)
			}
			places = append(places, place)
		}
		parts = append(parts, fmt.Sprintf("%g ms at %s Hz", toMS*t.rows[i].most, strings.Join(places, ", ")))
		i = j
	}
	return strings.Join(parts, "; ")
}
