package page

import (
	"math"
	"slices"

	"fettle/audit/figures"

	"gonum.org/v1/plot"
)

// timelines draw when each band arrives, how long it takes and how long it
// rings, one line a band, on one scale.
func timelines(subjects []Subject) []*chart {
	lowest, highest := timelineRange(subjects)
	var out []*chart
	for i, s := range subjects {
		c := timeline(s, penOf(i))
		c.name, c.title = numbered("timeline", subjects, i), "Timeline of the bands"+label(subjects, i)
		c.x.min, c.x.max = lowest, highest
		out = append(out, c)
	}
	return out
}

// peakMS is where the response's peak stands after the bulk latency, from which
// rings are counted; 0 where the response is not known.
func (s Subject) peakMS() float64 {
	if len(s.Response) == 0 || math.IsNaN(s.Figures.Latency) {
		return 0
	}
	peak := 0
	for n, v := range s.Response {
		if math.Abs(v) > math.Abs(s.Response[peak]) {
			peak = n
		}
	}
	return s.ms(peak) - s.Figures.Latency/s.Rate*toMS
}

// Rings stretch the time axis to so many times what arrivals and spreads take,
// unless all bands arrive together, which is within so many ms.
const (
	ringShown = 2
	together  = 1.0
)

func timelineRange(subjects []Subject) (lowest, highest float64) {
	var arrivals, rings []float64
	for _, s := range subjects {
		for _, b := range s.carried() {
			arrivals = append(arrivals, (b.Arrival-b.Spread)*toMS, (b.Arrival+b.Spread)*toMS)
			rings = append(rings, s.peakMS()-b.PreRing*toMS, s.peakMS()+b.PostRing*toMS)
		}
	}
	lowest, highest = timeRange(arrivals)
	allowed := ringShown * (highest - lowest)
	if highest-lowest < together {
		allowed = math.Inf(1)
	}
	for i, t := range rings {
		rings[i] = min(max(t, -allowed), allowed)
	}
	return timeRange(append(rings, arrivals...))
}

// carried are the subject's carried bands whose arrival is stated.
func (s Subject) carried() []figures.BandFigures {
	return slices.DeleteFunc(slices.Clone(s.Figures.Bands), func(b figures.BandFigures) bool {
		return !b.Carried || math.IsNaN(b.Arrival)
	})
}

func timeline(s Subject, p pen) *chart {
	bands := s.Figures.Bands
	c := &chart{tall: true, down: true, x: axis{label: "time after the bulk latency, ms"}}
	c.y = axis{label: "one-third-octave band, Hz", min: -0.7, max: float64(len(bands)) - 0.3}
	c.columns = []column{{"band", "Hz", 1}, {"arrival", "ms", 4}, {"spread", "ms", 4}, {"rings before", "ms", 2}, {"rings after", "ms", 2}}
	rings := segments{pen: pen{ink: ghost, width: 1}}
	spreads := segments{pen: pen{ink: p.ink, width: 5}}
	sure := segments{pen: pen{ink: text, width: 1}}
	arrivals := dots{ink: text}
	peak := s.peakMS()
	for i, b := range bands {
		at := float64(i)
		c.y.named = append(c.y.named, plot.Tick{Value: at, Label: shortHertz(b.Nominal)})
		if !b.Carried {
			none := cell{text: "not carried"}
			c.rows = append(c.rows, row{at, []cell{exact(b.Nominal), none, none, none, none}})
			continue
		}
		arrival, spread := b.Arrival*toMS, b.Spread*toMS
		cells := []cell{exact(b.Nominal), exact(arrival), exact(spread), exact(b.PreRing * toMS), exact(b.PostRing * toMS)}
		if s.Errors != nil {
			e := s.Errors.Bands[i]
			for k, half := range []float64{e.Arrival, e.Spread, e.PreRing, e.PostRing} {
				cells[k+1].half = half * toMS
			}
			sure.lines = append(sure.lines, segment{arrival - cells[1].half, at, arrival + cells[1].half, at})
		}
		c.rows = append(c.rows, row{at, cells})
		rings.lines = append(rings.lines, segment{peak - b.PreRing*toMS, at, peak + b.PostRing*toMS, at})
		spreads.lines = append(spreads.lines, segment{arrival - spread, at, arrival + spread, at})
		arrivals.x, arrivals.y = append(arrivals.x, arrival), append(arrivals.y, at)
	}
	zero := segments{[]segment{{0, c.y.min, 0, c.y.max}}, zeroLine}
	c.marks = []plot.Plotter{zero, rings, spreads, sure, arrivals}
	c.keys = []key{{text: "spread of the band", pen: pen{ink: p.ink, width: 5}}, {text: "rings, to 60 dB under the band's energy", pen: rings.pen}}
	c.note = "Dot: arrival. What is cut off at the edge is in the table. A band that is not carried has no mark."
	return c
}
