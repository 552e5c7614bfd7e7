package capture

import (
	"fmt"
	"math"
	"slices"

	"fettle/audit/atonce"
	"fettle/audit/estimate"
	"fettle/audit/figures"
)

const (
	// enough is the signal-to-noise ratio of the response, in dB, from which a
	// band's figures are stated.
	enough = 10.0
	// carriedWithin is how far under the median band a carried one may lie, dB.
	carriedWithin = 40.0
	// weak is the signal-to-noise ratio below which the user is warned.
	weak = 20.0
	// present is how far, as a ratio of energies, a channel's peak stands above the
	// noise when the probe is in it.
	present = 30.0
)

// channel measures one channel; driftErr is the drift's half width in ppm.
func (d *deconvolver) channel(number int, y []float64, driftErr float64) *Result {
	r := &Result{Channel: number, Rate: d.p.Rate}
	if clipped(y) {
		r.Warnings = append(r.Warnings, fmt.Sprintf("channel %d is clipped; lower the level and capture again", number))
	}
	e := d.gather(y)
	if !(e.top*e.top > present*e.perSample()) {
		r.Absent = "the probe is not in this channel"
		return r
	}
	linear := e.linear(e.mean)
	m := newMeasurement(e, linear, peakOf(linear))
	folded := r.warnFolded(m, linear)
	if !folded && m.goesOn(linear) {
		r.Warnings = append(r.Warnings, fmt.Sprintf("the response of channel %d still goes on %.1f s after its peak, when the next repeat begins; make a probe with a longer pause",
			number, float64(e.late)/float64(e.p.Rate)))
	}
	r.Noise = m.bandNoise()
	r.warnWeak(m)
	if r.Products = e.products(m.mean); folded {
		for i := range r.Products {
			r.Products[i].Level, r.Products[i].Err = math.NaN(), math.NaN()
			r.Products[i].NotStated = "folded harmonics fall among the orders"
		}
	}
	m.measureAll()
	m.state(r)
	r.placeIn(m, driftErr)
	return r
}

// perSample is the energy of a sample of the mean's noise.
func (e *ensemble) perSample() float64 {
	return e.noise.between(e.noise.response, 0, float64(e.p.Rate)/2) / float64(e.repeats)
}

// warnWeak says so when too little stands out of the noise.
func (r *Result) warnWeak(m *measurement) {
	count, low := 0, 0
	for i, n := range r.Noise {
		if m.inBand(n.Band) {
			count++
			if n.SNR < weak && m.power[i] >= m.median*math.Pow(10, -carriedWithin/10) {
				low++
			}
		}
	}
	if 2*low > count {
		r.Warnings = append(r.Warnings, fmt.Sprintf("the level is too low: in %d of %d bands of channel %d the response is less than %g dB above the noise; "+
			"raise the level, or make a probe with more or longer repeats", low, count, r.Channel, weak))
	}
}

// measurement is one channel's response, cut, with all that is measured of it.
type measurement struct {
	*ensemble
	gates  *gates
	peak   int       // index in the linear region
	mean   []float64 // cut
	origin int       // index of the aligned instant
	// cut is what of the mean is measured, cutOrigin the aligned instant's index in it.
	cut       []float64
	cutOrigin int
	bands     []figures.Band
	power     []float64 // of each band, mean |H|²
	snr       []float64 // dB
	median    float64   // power of the median band
	// whole is measured of the mean, parts of the mean without each group.
	whole *figures.Figures
	parts []*figures.Figures
	// other is measured under the other continuation; nil when that is the same.
	other *figures.Figures
}

func newMeasurement(e *ensemble, linear []float64, peak int) *measurement {
	m := &measurement{ensemble: e, peak: peak, bands: figures.Bands(float64(e.p.Rate))}
	m.gates = newGates(linear, peak, float64(e.p.Rate), func(hz float64) float64 {
		return e.noise.density(hz) / float64(e.repeats)
	})
	m.mean = m.gates.apply(linear)
	s := estimate.Transform(m.mean, e.early, float64(e.p.Rate))
	latency, _ := s.Latency()
	m.origin = e.early + int(math.Round(latency))
	for _, b := range m.bands {
		noise := m.noiseIn(b)
		power := max(s.Power(b)-noise, 0)
		m.power = append(m.power, power)
		m.snr = append(m.snr, 10*math.Log10(max(power/max(noise, negligible), negligible)))
	}
	m.median = m.medianPower()
	return m
}

// goesOn tells whether the response stands above the noise where its region ends.
func (m *measurement) goesOn(linear []float64) bool {
	var end float64
	from, to := m.early+m.late*7/10, m.early+m.late*9/10
	for _, v := range linear[from:to] {
		end += v * v
	}
	var all float64
	for _, v := range linear {
		all += v * v
	}
	return end > float64(to-from)*prominent*m.perSample() && end > loudEnd*all
}

// loudEnd is the share of a response's energy that its end may hold: -100 dB, for what rings
// longest is a narrow band.
const loudEnd = 1e-10

// noiseIn is the noise of the mean in a band, as mean |N|².
func (m *measurement) noiseIn(b figures.Band) float64 {
	ahead, behind := m.gates.lengths(m.gates.octaveOf(b.Centre), m.peak, len(m.mean))
	// A density per sample and Hz of the one-sided spectrum is |N|² over rate/2.
	return m.noise.density(b.Centre) / float64(m.repeats) * (ahead + behind) * float64(m.p.Rate) / 2
}

// inBand tells whether the probe covers a band.
func (m *measurement) inBand(b figures.Band) bool { return b.Lower >= m.p.From && b.Upper <= m.p.To }

func (m *measurement) medianPower() float64 {
	var p []float64
	for i, b := range m.bands {
		if m.inBand(b) && m.snr[i] >= enough {
			p = append(p, m.power[i])
		}
	}
	if len(p) == 0 {
		return slices.Max(append(m.power, 0))
	}
	slices.Sort(p)
	return p[len(p)/2]
}

// carried tells which bands verdicts speak of.
func (m *measurement) carried() []bool {
	out := make([]bool, len(m.bands))
	least := m.median * math.Pow(10, -carriedWithin/10)
	for i, b := range m.bands {
		out[i] = m.inBand(b) && m.snr[i] >= enough && m.power[i] >= least
	}
	return out
}

func (m *measurement) bandNoise() []Noise {
	var out []Noise
	for i, b := range m.bands {
		out = append(out, Noise{Band: b, Level: m.noise.level(b.Lower, b.Upper), SNR: m.snr[i]})
	}
	return out
}

// measureAll takes the figures of the mean, of it without each group, and of it
// under the other continuation.
func (m *measurement) measureAll() {
	responses := [][]float64{m.mean}
	at := []**figures.Figures{&m.whole}
	if len(m.groups) > 1 {
		m.parts = make([]*figures.Figures, len(m.groups))
		for i := range m.parts {
			responses = append(responses, m.gates.apply(m.linear(m.without(i))))
			at = append(at, &m.parts[i])
		}
	}
	if m.doubt != nil {
		h := m.linear(m.ensemble.mean)
		for i, v := range m.doubt {
			h[i] += v
		}
		responses = append(responses, m.gates.apply(h))
		at = append(at, &m.other)
	}
	carried := m.carried()
	from, to := m.gates.extent(len(m.mean))
	m.cut, m.cutOrigin = m.mean[from:to], m.origin-from
	atonce.Do(len(at), len(at), func(i int) { *at[i] = m.figuresOf(responses[i][from:to], m.origin-from, carried) })
}

// figuresOf measures at the level of the median band, and puts the level back.
func (m *measurement) figuresOf(h []float64, origin int, carried []bool) *figures.Figures {
	scale := 1 / math.Sqrt(m.median)
	x := make([]float64, len(h))
	for i, v := range h {
		x[i] = scale * v
	}
	f := figures.Measure(figures.Response{H: x, Origin: origin, Rate: float64(m.p.Rate), Carried: carried, Removed: float64(m.removed())})
	back := 10 * math.Log10(m.median)
	for i := range f.Bands {
		f.Bands[i].Gain += back
	}
	for i := range f.Curve.Magnitude {
		f.Curve.Magnitude[i] += back
	}
	return f
}

// removed is how many samples after the probe's first repeat the aligned instant is.
func (m *measurement) removed() int { return m.start - m.p.Lead + m.origin - m.early }

// placeIn fills in where the response is in time.
func (r *Result) placeIn(m *measurement, driftErr float64) {
	r.Removed = m.removed()
	r.Response, r.Origin = m.cut, m.cutOrigin
	r.Latency = float64(r.Removed) + r.Figures.Latency
	r.LatencyErr = r.Errors.Latency
	if m.repeats > 1 {
		// Drift is taken back from the middle of the repeats to the first.
		lever := float64(m.p.Period) * float64(m.repeats-1) / 2
		r.LatencyErr = math.Hypot(r.LatencyErr, lever*driftErr*1e-6)
	}
	for _, f := range m.parts {
		r.latencies = append(r.latencies, float64(r.Removed)+f.Latency)
	}
}

// differenceErr is the half width of how much later r is than another channel:
// what both share, the clock among it, cancels.
func (r *Result) differenceErr(other *Result) float64 {
	if r == other {
		return 0
	}
	var off []float64
	for i, v := range r.latencies {
		off = append(off, v-other.latencies[i])
	}
	_, half := estimate.Jackknife(r.Latency-other.Latency, off)
	return half
}
