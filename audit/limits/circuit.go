package limits

import "math"

// circuit makes a set from a mask on the excess over the least delay.
func circuit(name, source string, status Status, t table, between, help string) Limit {
	return Limit{
		Name: name, Source: source, Status: status,
		Measure: "arrival less the earliest of the carried bands in the table's range",
		Range:   t.span(), Values: t.values(), Between: between, Help: help,
		unit: "ms", judge: t.judgeExcess,
	}
}

func (t table) judgeExcess(s Subject, v *Verdict) {
	bands := s.carried()
	least, half, compared := t.least(bands)
	for _, b := range bands {
		most, ok := t.at(b.Band)
		switch {
		case !ok:
			v.Uncovered = append(v.Uncovered, b.Nominal)
		case math.IsNaN(b.arrival):
			v.unstated(b.Band, s.reason(bandKey(b)))
		case compared < 2:
			v.unstated(b.Band, "no second band with a stated arrival in the table's range to compare with")
		default:
			v.Points = append(v.Points, Point{
				Hz: b.Nominal, Value: toMS * (b.arrival - least), Limit: toMS * most, Half: toMS * (b.half + half),
			})
		}
	}
}

// least is the earliest stated arrival in the table's range, the most that its
// interval can move it, and how many bands were compared.
func (t table) least(bands []timed) (seconds, half float64, compared int) {
	seconds = math.Inf(1)
	for _, b := range bands {
		if !holds(b.Band, t.from(), t.to()) || math.IsNaN(b.arrival) {
			continue
		}
		compared++
		seconds, half = min(seconds, b.arrival), max(half, b.half)
	}
	return seconds, half, compared
}
