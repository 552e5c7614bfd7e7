package limits

import (
	"math"

	"fettle/audit/figures"
)

// Subject is what is judged. NaN is not stated.
type Subject struct {
	Figures *figures.Figures
	// Errors has at the places of Figures the half widths of their 95 %
	// intervals. Nil: the figures are exact; NaN: that interval is not known, and
	// the figure is taken as it is.
	Errors *figures.Figures
	Rate   float64 // Hz
	// Latency in samples is how long a listener would wait, and LatencyError the
	// half width of its interval.
	Latency, LatencyError float64
	TargetError           float64 // dB
}

// Of is a subject of which only the figures are known: its latency and target
// error are not stated until they are set.
func Of(f *figures.Figures, rate float64) Subject {
	return Subject{Figures: f, Rate: rate, Latency: math.NaN(), TargetError: math.NaN()}
}

// OfBands is a subject of which no more is known than its bands and, in
// seconds, its delay spread, such as a processed file beside its original. errs
// are the half widths of the bands' intervals, one for each band, or nil. What
// is NaN in a band is not stated; reasons are those of figures.Figures.
func OfBands(rate float64, bands, errs []figures.BandFigures, spread, spreadError float64, reasons map[string]string) Subject {
	fill := func(bands []figures.BandFigures, spread float64) *figures.Figures {
		f := figures.Measure(figures.Response{Rate: rate}) // nothing is stated without a response
		f.Bands, f.DelaySpread, f.NotStated = bands, spread, map[string]string{}
		return f
	}
	s := Of(fill(bands, spread), rate)
	for key, why := range reasons {
		s.Figures.NotStated[key] = why
	}
	if errs != nil {
		s.Errors = fill(errs, spreadError)
	}
	return s
}

// timed is one carried band.
type timed struct {
	figures.Band
	arrival, half float64 // s; arrival NaN: not stated
	phase         float64 // degrees, the phase deviation
}

// carried lists the carried bands.
func (s Subject) carried() []timed {
	var out []timed
	for i, b := range s.Figures.Bands {
		if !b.Carried {
			continue
		}
		t := timed{Band: b.Band, arrival: b.Arrival, phase: b.PhaseDeviation}
		if s.Errors != nil {
			t.half = known(s.Errors.Bands[i].Arrival)
		}
		out = append(out, t)
	}
	return out
}

// known is a half width, 0 where it is not known.
func known(half float64) float64 {
	if math.IsNaN(half) {
		return 0
	}
	return half
}

// figure reads one number of the figures with the half width of its interval.
func (s Subject) figure(get func(f *figures.Figures) float64) (value, half float64) {
	if s.Errors != nil {
		half = known(get(s.Errors))
	}
	return get(s.Figures), half
}

// reason is why the figure of a key is not stated.
func (s Subject) reason(key string) string {
	for _, k := range []string{key, "response"} {
		if why := s.Figures.NotStated[k]; why != "" {
			return why
		}
	}
	return "the audit does not state it"
}
