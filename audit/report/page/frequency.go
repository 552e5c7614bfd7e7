package page

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"fettle/audit/figures"
	"fettle/audit/limits"

	"gonum.org/v1/plot"
)

const toMS = 1e3

// below is how far under its maximum, in dB, a magnitude is drawn.
const below = 80

// quantity is something over frequency or bands, of each subject.
type quantity struct {
	name, unit string
	digits     int
	of         func(s Subject, i int) float64
	half       func(errs *figures.Figures, i int) float64
}

func (q quantity) at(s Subject, i int) cell {
	c := exact(q.of(s, i))
	if s.Errors != nil && q.half != nil {
		c.half = q.half(s.Errors, i)
	}
	return c
}

// hertzAxis is that of all plots over frequency of these subjects.
func hertzAxis(subjects []Subject) axis {
	a := axis{label: "frequency, Hz", min: 10, log: true}
	for _, s := range subjects {
		a.max = max(a.max, s.Rate/2)
	}
	return a
}

// overCurves sets up a chart of a quantity at each frequency of the subjects'
// curves. Subjects of another rate have no value where their curve has ended.
func overCurves(subjects []Subject, q quantity) *chart {
	c := &chart{x: hertzAxis(subjects), columns: []column{{"frequency", "Hz", 1}}}
	c.y.label = q.name + ", " + q.unit
	longest := subjects[0].Figures.Curve.Hz
	for i, s := range subjects {
		hz := s.Figures.Curve.Hz
		y, low, high := make([]float64, len(hz)), make([]float64, len(hz)), make([]float64, len(hz))
		for k := range hz {
			v := q.at(s, k)
			y[k], low[k], high[k] = v.value, v.value-v.half, v.value+v.half
		}
		p := penOf(i)
		if s.Errors != nil {
			c.marks = append(c.marks, ribbon{hz, low, high, p.ink, 60})
		}
		c.marks = append(c.marks, curve{hz, y, p})
		c.keys = append(c.keys, key{text: s.Label, pen: p})
		c.columns = append(c.columns, column{s.Label, q.unit, q.digits})
		if len(hz) > len(longest) {
			longest = hz
		}
	}
	for k, hz := range longest {
		cells := []cell{exact(hz)}
		for _, s := range subjects {
			v := exact(math.NaN())
			if at := s.Figures.Curve.Hz; k < len(at) && at[k] == hz {
				v = q.at(s, k)
			}
			cells = append(cells, v)
		}
		c.rows = append(c.rows, row{hz, cells})
	}
	return c
}

func magnitude(subjects []Subject) *chart {
	c := overCurves(subjects, quantity{"magnitude", "dB", 2,
		func(s Subject, i int) float64 { return s.Figures.Curve.Magnitude[i] },
		func(e *figures.Figures, i int) float64 { return e.Curve.Magnitude[i] }})
	c.name, c.title = "magnitude", "Magnitude"
	c.note = "What passes at each frequency, relative to the input."
	lowest, highest := math.Inf(1), math.Inf(-1)
	for _, s := range subjects {
		for _, db := range s.Figures.Curve.Magnitude {
			if !math.IsNaN(db) {
				lowest, highest = min(lowest, db), max(highest, db)
			}
		}
	}
	if lowest > highest { // nothing is stated
		lowest, highest = 0, 0
	}
	c.y.min, c.y.max = roundedRange(min(max(lowest, highest-below), highest-12), highest+3)
	if t := targets(subjects); t != nil {
		var under []plot.Plotter
		for _, s := range t {
			under = append(under, ribbon{s.Figures.Curve.Hz, s.Target.Low, s.Target.High, shade, 255},
				curve{s.Figures.Curve.Hz, s.Target.Low, pen{ink: ghost, width: 0.6}}, curve{s.Figures.Curve.Hz, s.Target.High, pen{ink: ghost, width: 0.6}})
		}
		c.marks = append(under, c.marks...)
		c.keys = append(c.keys, key{text: "target and tolerance", pen: pen{ink: shade}, fill: true})
		c.note += " The next plot shows the tolerance close up."
	}
	return c
}

// targets are the subjects that have a target, one for each that differs.
func targets(subjects []Subject) []Subject {
	var out []Subject
	for _, s := range subjects {
		if s.Target == nil {
			continue
		}
		known := slices.ContainsFunc(out, func(o Subject) bool {
			return slices.Equal(o.Target.Low, s.Target.Low) && slices.Equal(o.Target.High, s.Target.High)
		})
		if !known {
			out = append(out, s)
		}
	}
	return out
}

// closeUp is how many tolerances a close-up shows.
const closeUp = 8

// offTarget is NaN where there is too little to be held against anything.
func offTarget(s Subject, i int) float64 {
	if s.Figures.Curve.Magnitude[i] < slices.Max(s.Figures.Curve.Magnitude)-60 {
		return math.NaN()
	}
	return s.Figures.Curve.Magnitude[i] - s.Target.Aim[i]
}

// deviation is the magnitude less its target. Nil: none has a target.
func deviation(subjects []Subject) *chart {
	var aimed []Subject
	for _, s := range subjects {
		if s.Target != nil {
			aimed = append(aimed, s)
		}
	}
	if aimed == nil {
		return nil
	}
	c := overCurves(aimed, quantity{name: "off target", unit: "dB", digits: 4, of: offTarget})
	c.name, c.title = "off-target", "Magnitude off its target"
	c.note = "Shaded: what the chain's tolerance allows. Not drawn: what is more than 60 dB under the maximum, or off by more than eight tolerances; the table has the latter."
	var under []plot.Plotter
	var wide, off []float64
	for i, s := range targets(aimed) {
		var low, high []float64
		for k, aim := range s.Target.Aim {
			low, high = append(low, s.Target.Low[k]-aim), append(high, s.Target.High[k]-aim)
		}
		if i == 0 {
			c.keys = append(c.keys, key{text: "tolerance", pen: pen{ink: shade}, fill: true})
		}
		under = append(under, ribbon{s.Figures.Curve.Hz, low, high, shade, 255})
		wide = append(wide, high...)
	}
	for _, s := range aimed {
		for k := range s.Target.Aim {
			if x := math.Abs(offTarget(s, k)); !math.IsNaN(x) {
				off = append(off, x)
			}
		}
	}
	c.marks = append(append(under, c.zero()), c.marks...)
	slices.Sort(wide)
	tolerance := max(wide[len(wide)/2], 0.01)
	reach := min(max(1.3*slices.Max(off), 2*tolerance), closeUp*tolerance)
	c.y.min, c.y.max = -reach, reach
	return c
}

// zero is a line at 0 across a chart.
func (c *chart) zero() plot.Plotter {
	return segments{[]segment{{c.x.min, 0, c.x.max, 0}}, zeroLine}
}

// delayAt is the group delay relative to the bulk latency, in ms.
func delayAt(s Subject, i int) float64 {
	return s.Figures.Curve.GroupDelay[i]*toMS - (s.Removed+s.Figures.Latency)/s.Rate*toMS
}

func groupDelay(subjects []Subject) *chart {
	c := overCurves(subjects, quantity{"group delay", "ms", 4, delayAt,
		func(e *figures.Figures, i int) float64 { return e.Curve.GroupDelay[i] * toMS }})
	c.name, c.title = "group-delay", "Group delay"
	c.note = "Relative to the bulk latency, which alignment removes; later is up. Dots: arrivals of the one-third-octave bands that are carried. No line where the magnitude is more than 60 dB under its maximum."
	c.marks = append([]plot.Plotter{c.zero()}, c.marks...)
	var seen []float64
	for i, s := range subjects {
		d := dots{ink: penOf(i).ink}
		for _, b := range s.Figures.Bands {
			if b.Carried {
				d.x, d.y = append(d.x, b.Centre), append(d.y, b.Arrival*toMS)
			}
		}
		c.marks = append(c.marks, d)
		seen = append(seen, d.y...)
		seen = append(seen, carriedDelays(s)...)
	}
	c.y.min, c.y.max = timeRange(seen)
	return c
}

// carriedDelays are the curve's group delays within carried bands, in ms.
func carriedDelays(s Subject) []float64 {
	var out []float64
	for i, hz := range s.Figures.Curve.Hz {
		for _, b := range s.Figures.Bands {
			if b.Carried && hz >= b.Lower && hz < b.Upper {
				out = append(out, delayAt(s, i))
			}
		}
	}
	return out
}

// leastTime is the least range of a time axis, in ms.
const leastTime = 0.2

// timeRange holds all times that are stated, and zero, with a margin.
func timeRange(ms []float64) (lowest, highest float64) {
	for _, t := range ms {
		if !math.IsNaN(t) {
			lowest, highest = min(lowest, t), max(highest, t)
		}
	}
	if width := highest - lowest; width < leastTime {
		lowest, highest = lowest-(leastTime-width)/2, highest+(leastTime-width)/2
	}
	margin := 0.06 * (highest - lowest)
	return roundedRange(lowest-margin, highest+margin)
}

// underLimits has a chart for each subject and each limit on its bands' times.
func underLimits(subjects []Subject) []*chart {
	var out []*chart
	for i, s := range subjects {
		for _, v := range s.Verdicts {
			if points := s.bandPoints(v); len(points) > 0 {
				c := underLimit(subjects, i, v, points)
				c.name, c.title = numbered("limit-"+strings.ReplaceAll(v.Name, " ", "-"), subjects, i), "Band arrivals under "+v.Name+label(subjects, i)
				out = append(out, c)
			}
		}
	}
	return out
}

// bandPoints are what a verdict says of each band, by nominal frequency; nil: it
// does not judge when bands arrive. A bound on delay spread lets each band be
// so much later than the first.
func (s Subject) bandPoints(v limits.Verdict) map[float64]limits.Point {
	if v.Unit != "ms" || len(v.Points) == 0 {
		return nil
	}
	out := map[float64]limits.Point{}
	switch {
	case v.Status != limits.Own:
		for _, p := range v.Points {
			if !math.IsNaN(p.Hz) { // masking judges the whole response
				out[p.Hz] = p
			}
		}
	case strings.HasPrefix(v.Name, "delay-spread"):
		first := math.Inf(1)
		for _, b := range s.carried() {
			first = min(first, b.Arrival*toMS)
		}
		for _, b := range s.carried() {
			out[b.Nominal] = limits.Point{Hz: b.Nominal, Value: b.Arrival*toMS - first, Limit: v.Points[0].Limit}
		}
	}
	return out
}

// underLimit draws what each carried band's arrival may be: the limit stands
// as far from the arrival as from the value that was judged.
func underLimit(subjects []Subject, i int, v limits.Verdict, points map[float64]limits.Point) *chart {
	s, p := subjects[i], penOf(i)
	c := &chart{x: hertzAxis(subjects)}
	c.y.label = "arrival, ms"
	c.note = fmt.Sprintf("Verdict: %s. Measure: %s. Source: %s. Bars: when each carried band arrives, relative to the bulk latency.", v.Outcome, v.Measure, v.Source)
	c.columns = []column{{"band", "Hz", 1}, {"arrival", "ms", 4}, {"value judged", "ms", 4}, {"limit", "ms", 4}, {"arrival allowed", "ms", 4}}
	bars, allowed := segments{pen: pen{ink: p.ink, width: 2.6}}, segments{pen: boundLine}
	var low, high []segment
	var seen []float64
	for band, b := range s.Figures.Bands {
		if !b.Carried {
			continue
		}
		arrival := exact(b.Arrival * toMS)
		if s.Errors != nil {
			arrival.half = s.Errors.Bands[band].Arrival * toMS
		}
		none := cell{text: "no published limit"}
		cells := []cell{exact(b.Nominal), arrival, none, none, none}
		bars.lines = append(bars.lines, segment{b.Lower, arrival.value, b.Upper, arrival.value})
		seen = append(seen, arrival.value)
		if pt, ok := points[b.Nominal]; ok {
			at := arrival.value - pt.Value + pt.Limit
			cells[2], cells[3], cells[4] = cell{value: pt.Value, half: pt.Half}, exact(pt.Limit), exact(at)
			allowed.lines = append(allowed.lines, segment{b.Lower, at, b.Upper, at})
			seen = append(seen, at)
		}
		if arrival.half > 0 {
			low = append(low, segment{b.Lower, arrival.value - arrival.half, b.Upper, arrival.value - arrival.half})
			high = append(high, segment{b.Lower, arrival.value + arrival.half, b.Upper, arrival.value + arrival.half})
		}
		c.rows = append(c.rows, row{b.Centre, cells})
	}
	for k := range low {
		c.marks = append(c.marks, ribbon{[]float64{low[k].x0, low[k].x1}, []float64{low[k].y0, low[k].y1}, []float64{high[k].y0, high[k].y1}, p.ink, 60})
	}
	c.marks = append(c.marks, c.zero(), bars, allowed)
	c.keys = []key{{text: "arrival, " + s.Label, pen: bars.pen}, {text: "limit " + v.Name, pen: boundLine}}
	c.y.min, c.y.max = timeRange(seen)
	return c
}

// phaseDeviation draws each carried band's. Nil: none is stated.
func phaseDeviation(subjects []Subject) *chart {
	q := quantity{"phase deviation", "degrees", 2,
		func(s Subject, i int) float64 {
			if !s.Figures.Bands[i].Carried {
				return math.NaN()
			}
			return s.Figures.Bands[i].PhaseDeviation
		},
		func(e *figures.Figures, i int) float64 { return e.Bands[i].PhaseDeviation }}
	c := &chart{name: "phase-deviation", title: "Phase deviation", x: hertzAxis(subjects)}
	c.y.label = "phase deviation, degrees"
	c.note = "How far each carried band's phase lies, on average, from that of a plain delay."
	c.columns = []column{{"band", "Hz", 1}}
	worst, stated := 1.0, false
	longest := subjects[0].Figures.Bands
	for i, s := range subjects {
		p := penOf(i)
		m := segments{pen: p}
		for k, b := range s.Figures.Bands {
			v := q.at(s, k)
			m.lines = append(m.lines, segment{b.Lower, v.value, b.Upper, v.value})
			if v.half > 0 {
				c.marks = append(c.marks, ribbon{[]float64{b.Lower, b.Upper}, []float64{v.value - v.half, v.value - v.half}, []float64{v.value + v.half, v.value + v.half}, p.ink, 60})
			}
			if v.value > worst {
				worst = v.value
			}
		}
		stated = stated || slices.ContainsFunc(m.lines, func(l segment) bool { return !math.IsNaN(l.y0) })
		c.marks = append(c.marks, m)
		c.keys = append(c.keys, key{text: s.Label, pen: p})
		c.columns = append(c.columns, column{s.Label, q.unit, q.digits})
		if len(s.Figures.Bands) > len(longest) {
			longest = s.Figures.Bands
		}
	}
	if !stated {
		return nil
	}
	for k, b := range longest {
		cells := []cell{exact(b.Nominal)}
		for _, s := range subjects {
			switch {
			case k >= len(s.Figures.Bands) || !s.Figures.Bands[k].Carried:
				cells = append(cells, cell{text: "not carried"})
			default:
				cells = append(cells, q.at(s, k))
			}
		}
		c.rows = append(c.rows, row{b.Centre, cells})
	}
	_, c.y.max = roundedRange(0, 1.08*worst)
	return c
}
