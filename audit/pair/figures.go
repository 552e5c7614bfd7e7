package pair

import (
	"math"

	"fettle/audit/figures"
	"fettle/audit/limits"
)

// noResponse is why a pair has no figures in time.
const noResponse = "a recording beside its original shows no impulse response; use a probe"

// FiguresOf gives what is known of a channel in the form of package figures, relative to
// the report's Lag, and the half widths of the 95 % intervals at the same places. What a
// pair cannot show is NaN.
func (r *Report) FiguresOf(c *Result) (f, errs *figures.Figures) {
	f, errs = Blank(), Blank()
	f.NotStated = map[string]string{"response": noResponse, "smear": noResponse, "pre_ring": noResponse, "post_ring": noResponse,
		"d90_ms": noResponse, "d999_ms": noResponse, "lead_ms": noResponse, "phase_deviation": noResponse, "sum_test": noResponse}
	for key, why := range c.NotStated {
		f.NotStated[key] = why
	}
	f.Latency, errs.Latency = c.Delay-float64(r.Lag), c.DelayErr
	f.Polarity = c.Polarity
	f.DelaySpread, errs.DelaySpread = c.DelaySpread, c.DelaySpreadErr
	for _, b := range c.Bands {
		nan := math.NaN()
		f.Bands = append(f.Bands, figures.BandFigures{Band: b.Band, Carried: b.Carried, Gain: b.Gain, Arrival: b.Arrival, Spread: b.Spread,
			PreRing: nan, PostRing: nan, PhaseDeviation: nan})
		errs.Bands = append(errs.Bands, figures.BandFigures{Band: b.Band, Carried: b.Carried, Gain: b.GainErr, Arrival: b.ArrivalErr, Spread: b.SpreadErr,
			PreRing: nan, PostRing: nan, PhaseDeviation: nan})
	}
	f.Curve = figures.Curve{Hz: c.Curve.Hz, Magnitude: c.Curve.Magnitude, Phase: c.Curve.Phase, GroupDelay: c.Curve.GroupDelay}
	errs.Curve = figures.Curve{Hz: c.Curve.Hz, Magnitude: unknown(len(c.Curve.Hz)), Phase: unknown(len(c.Curve.Hz)), GroupDelay: unknown(len(c.Curve.Hz))}
	return f, errs
}

// Blank states nothing.
func Blank() *figures.Figures {
	nan := math.NaN()
	smear := figures.Smear{Total: nan, Magnitude: nan, Phase: nan}
	column := figures.RingColumn{Level: nan, Length: nan, Beyond: [3]float64{nan, nan, nan}, MainLobe: nan}
	ring := figures.Ring{White: column, Pink: column}
	return &figures.Figures{Latency: nan, DelaySpread: nan, Pink: smear, White: smear, D90: nan, D999: nan,
		PreRing: ring, PostRing: ring, Lead: nan, PhaseDeviation: nan, SumTest: nan}
}

func unknown(n int) []float64 {
	x := make([]float64, n)
	for i := range x {
		x[i] = math.NaN()
	}
	return x
}

// Judge holds every channel that has figures against limits.
func (r *Report) Judge(l []limits.Limit) {
	for _, c := range r.Channels {
		if c.Absent != "" {
			continue
		}
		f, errs := r.FiguresOf(c)
		s := limits.OfBands(float64(r.Rate), f.Bands, errs.Bands, f.DelaySpread, errs.DelaySpread, f.NotStated)
		s.Latency, s.LatencyError = c.Delay, c.DelayErr
		c.Verdicts = limits.Judge(s, l)
	}
}
