package pair

import (
	"fmt"
	"math"
	"slices"

	"fettle/audit/estimate"
	"fettle/audit/figures"
	"fettle/audit/limits"
)

// Result is one channel.
type Result struct {
	Channel int // from 1
	// Absent says why there is nothing else, or is "".
	Absent string
	// Delay is the bulk latency in samples over the frequencies that are coherent, Lag
	// included; Err its half width.
	Delay, DelayErr float64
	Polarity        int // +1, -1; 0: not stated
	// Gain is the coherent output power over the input power, dB.
	Gain, GainErr float64
	// DelaySpread is the greatest less the least arrival of the carried bands, s.
	DelaySpread, DelaySpreadErr float64
	// Coherence is γ² of the whole.
	Coherence float64
	Bands     []Band
	Curve     Curve
	// NotStated has a reason for what is NaN, under the keys of the audit's JSON.
	NotStated map[string]string
	// Verdicts are on the limits that Judge was given.
	Verdicts []limits.Verdict
}

// Band is one band of the transfer function. Times are relative to the bulk
// latency. NaN is not stated.
type Band struct {
	figures.Band
	Carried             bool
	Coherence           float64
	Gain, GainErr       float64 // dB
	Arrival, ArrivalErr float64 // s
	Spread, SpreadErr   float64 // s
}

// Curve is the transfer function over frequency; NaN where coherence is too low.
type Curve struct {
	Hz         []float64
	Magnitude  []float64 // dB
	Phase      []float64 // degrees, the nearest whole number to Delay taken out
	GroupDelay []float64 // s, Delay included
	Coherence  []float64
}

const (
	segmentSeconds = 1.5
	mostGroups     = 12
	leastGroups    = 3
	// leastSegments is how many segments a group has at least.
	leastSegments = 2
	// coherent is the least γ² of a band that figures are stated from.
	coherent = 0.5
	// carriedWithin is how far under the median band a carried one may lie, dB.
	carriedWithin = 40.0
	// silence is the energy of a segment, as a share of the loudest's, under which it
	// tells nothing.
	silence = 1e-7
)

// mostRounds bounds how often the recordings are read to refine the responses.
const mostRounds = 4

// measure averages spectra and takes the figures.
func (c *comparison) measure() error {
	size := c.segmentSize()
	w := make([]*welch, c.channels) // they work at the same time
	for ch := range w {
		w[ch] = newWelch(size)
	}
	groups, err := c.sums(size, w)
	if err != nil {
		return err
	}
	channels := make([]*channel, c.channels)
	for ch, g := range groups {
		r := &Result{Channel: ch + 1, NotStated: map[string]string{}}
		c.report.Channels = append(c.report.Channels, r)
		if r.Absent = whyAbsent(g); r.Absent == "" {
			channels[ch] = newChannel(g)
			channels[ch].explain(w[ch], false)
		}
	}
	if err := c.refine(channels, size, w); err != nil {
		return err
	}
	for ch, r := range c.report.Channels {
		if channels[ch] != nil {
			r.measure(c, channels[ch])
		}
	}
	c.judge(channels)
	return nil
}

// sums reads the recordings and adds up spectra, in groups, of each channel.
func (c *comparison) sums(size int, w []*welch) ([][]group, error) {
	all := make([][mostGroups]group, c.channels)
	err := c.average(size, func(part, ch int, middle float64, x, y []float64) {
		g := &all[ch][part]
		if g.spectra == nil {
			*g = group{part: part, spectra: newSpectra(size)}
		}
		g.frames += middle
		w[ch].segment(g.spectra, x, y)
	})
	groups := make([][]group, c.channels)
	for ch := range all {
		for _, g := range all[ch] {
			if g.spectra != nil {
				groups[ch] = append(groups[ch], g)
			}
		}
	}
	return groups, err
}

// whyAbsent says why nothing can be said about a channel, or "".
func whyAbsent(groups []group) string {
	switch {
	case len(groups) == 0:
		return "silence leaves nothing to measure"
	case len(groups) < leastGroups:
		return fmt.Sprintf("only %d stretches of it hold sound, %d are needed", len(groups), leastGroups)
	}
	all := newSpectra(groups[0].spectra.size())
	for _, g := range groups {
		all.add(g.spectra, 1)
	}
	if !(all.coherence(0, len(all.xx)) > 2/float64(all.segments)) {
		return "the processed channel has nothing in common with the original"
	}
	return ""
}

// refine reads the recordings again until the responses stand.
func (c *comparison) refine(channels []*channel, size int, w []*welch) error {
	for round := range mostRounds {
		responses, open := make([][]complex128, len(channels)), false
		for ch, v := range channels {
			if v != nil && !v.done {
				v.clear()
				responses[ch], open = w[ch].transfer(v.h), true
			}
		}
		if !open {
			return nil
		}
		err := c.average(size, func(part, ch int, _ float64, x, y []float64) {
			if responses[ch] != nil {
				w[ch].left(channels[ch].of(part), x, y, responses[ch])
			}
		})
		if err != nil {
			return err
		}
		for ch, v := range channels {
			if responses[ch] != nil {
				v.explain(w[ch], round == mostRounds-1)
			}
		}
	}
	return nil
}

// measure takes the figures of one channel.
func (r *Result) measure(c *comparison, v *channel) {
	s := v.spectra
	r.Coherence = s.coherence(0, len(s.xx))
	whole := v.view(v.h, s.gain(), float64(c.rate))
	var parts []*view
	for i, h := range v.parts {
		parts = append(parts, v.view(h, s.without(v.groups[i].spectra).gain(), float64(c.rate)))
	}
	r.fill(v, s, whole, parts, c)
}

// fill puts the figures of the whole and their intervals into the result.
func (r *Result) fill(v *channel, s *spectra, whole *view, parts []*view, c *comparison) {
	delays, gains := make([]float64, len(parts)), make([]float64, len(parts))
	for i, p := range parts {
		delays[i], gains[i] = p.delay, p.gain
	}
	delay, half := estimate.Jackknife(whole.delay, delays)
	r.Delay, r.DelayErr = float64(c.lag)+delay, half
	if r.Polarity = whole.sign; r.Polarity == 0 {
		r.NotStated["polarity"] = "the phase at the bulk latency is neither near 0 nor near 180 degrees, or has no common value"
	}
	r.Gain, r.GainErr, _, _ = estimate.Decibels(estimate.Jackknife(whole.gain, gains))
	r.fillBands(v, s, whole, parts, c)
	r.fillCurve(s, whole, c)
}

func (r *Result) fillBands(v *channel, s *spectra, whole *view, parts []*view, c *comparison) {
	hz := float64(c.rate) / float64(2*s.size())
	power := make([]float64, len(whole.bands))
	late := v.late(float64(c.rate))
	cut := slices.Max(append(late, 0)) > wellAfter
	inner := v.view(middle(v.h), s.gain(), float64(c.rate))
	for i, b := range figures.Bands(float64(c.rate)) {
		lo, hi := int(math.Ceil(b.Lower/hz)), int(b.Upper/hz)+1
		band := Band{Band: b, Coherence: s.coherence(lo, hi)}
		nan := math.NaN()
		band.Gain, band.GainErr, band.Arrival, band.ArrivalErr, band.Spread, band.SpreadErr = nan, nan, nan, nan, nan, nan
		switch {
		case hi-lo < 2:
			r.NotStated[bandKey(b)] = "the recording is too short to resolve the band"
		case band.Coherence < coherent:
			r.NotStated[bandKey(b)] = fmt.Sprintf("coherence is %.2f, less than %g", band.Coherence, coherent)
		default:
			band.fill(i, whole, parts)
			power[i] = whole.bands[i].Power
			if why := band.whyUnended(late[i], v.reach(float64(c.rate))); why != "" {
				r.NotStated[bandKey(b)] = why
			}
			if cut {
				band.doubtArrival(inner.arrival(i))
			}
			if band.doubtSpread(math.Sqrt(max(inner.bands[i].Spread2, 0))); math.IsNaN(band.Spread) && !math.IsNaN(band.Arrival) {
				r.NotStated[bandKey(b)+".spread_ms"] = "noise in what was found of the response decides it"
			}
		}
		r.Bands = append(r.Bands, band)
	}
	r.carry(power, whole, parts)
}

func bandKey(b figures.Band) string { return fmt.Sprintf("bands[%g Hz]", b.Nominal) }

// fill sets one band's figures.
func (b *Band) fill(i int, whole *view, parts []*view) {
	n := len(parts)
	gain, arrival, spread := make([]float64, n), make([]float64, n), make([]float64, n)
	for j, p := range parts {
		gain[j] = p.bands[i].Power
		arrival[j] = p.arrival(i)
		spread[j] = p.bands[i].Spread2
	}
	b.Gain, b.GainErr, _, _ = estimate.Decibels(estimate.Jackknife(whole.bands[i].Power, gain))
	b.Arrival, b.ArrivalErr = estimate.Jackknife(whole.arrival(i), arrival)
	b.Spread, b.SpreadErr = estimate.RootOf(estimate.Jackknife(whole.bands[i].Spread2, spread))
}

// arrival is a band's arrival after the bulk latency.
func (v *view) arrival(i int) float64 { return v.bands[i].Arrival - v.delay/v.at.Rate() }

// carry marks the carried bands and takes the delay spread over them.
func (r *Result) carry(power []float64, whole *view, parts []*view) {
	median := medianOf(power)
	for i := range r.Bands {
		r.Bands[i].Carried = power[i] > 0 && power[i] >= median*math.Pow(10, -carriedWithin/10)
	}
	spread := func(v *view) float64 {
		first, last := math.Inf(1), math.Inf(-1)
		for i, b := range r.Bands {
			if b.Carried {
				first, last = min(first, v.bands[i].Arrival), max(last, v.bands[i].Arrival)
			}
		}
		return last - first
	}
	if math.IsInf(spread(whole), 0) {
		r.DelaySpread, r.DelaySpreadErr = math.NaN(), math.NaN()
		r.NotStated["delay_spread"] = "no band is carried"
		return
	}
	for _, b := range r.Bands {
		if b.Carried && math.IsNaN(b.Arrival) {
			r.DelaySpread, r.DelaySpreadErr = math.NaN(), math.NaN()
			r.NotStated["delay_spread"] = "the arrival of a carried band is not stated"
			return
		}
	}
	var without []float64
	for _, p := range parts {
		without = append(without, spread(p))
	}
	r.DelaySpread, r.DelaySpreadErr = estimate.Jackknife(spread(whole), without)
	r.DelaySpread = max(r.DelaySpread, 0)
}
