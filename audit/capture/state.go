package capture

import (
	"fmt"
	"math"

	"fettle/audit/estimate"
	"fettle/audit/figures"
)

// sort says what the jackknife is applied to.
type sort int

const (
	plain  sort = iota
	spread      // a root: noise adds to its square
	smear       // a root that is not stated when its interval reaches 0
	level       // dB: noise adds to the energy
	angle       // degrees, modulo 360
	mean        // of what is never negative
	length      // a time read to the sample, never negative
)

// entry is one number of a figures.Figures.
type entry struct {
	at   *float64
	sort sort
	key  string // under which it is not stated
}

// nothing is the time, in seconds, under which a root is 0 whatever its interval.
const nothing = 1e-9

// entries lists the numbers of f, in the same order for every f of a rate.
func entries(f *figures.Figures) []entry {
	list := []entry{
		{&f.Latency, plain, "residual_samples"},
		{&f.DelaySpread, mean, "delay_spread"},
		{&f.PhaseDeviation, mean, "phase_deviation"},
		{&f.SumTest, plain, "sum_test"},
		{&f.D90, length, "d90_ms"},
		{&f.D999, length, "d999_ms"},
		{&f.Lead, length, "lead_ms"},
	}
	smears := func(s *figures.Smear, name string) {
		list = append(list,
			entry{&s.Total, smear, "smear." + name + ".total_ms"},
			entry{&s.Magnitude, smear, "smear." + name + ".magnitude_ms"},
			entry{&s.Phase, smear, "smear." + name + ".phase_ms"})
	}
	smears(&f.Pink, "pink")
	smears(&f.White, "white")
	column := func(c *figures.RingColumn, name, beyond string) {
		list = append(list, entry{&c.Level, level, name + "_db"}, entry{&c.Length, length, name + "_ms"},
			entry{&c.MainLobe, plain, name + "_main_lobe"})
		for i, t := range figures.BeyondTimes {
			list = append(list, entry{&c.Beyond[i], level, fmt.Sprintf("%s[%g]", beyond, 1e3*t)})
		}
	}
	ring := func(r *figures.Ring, name string) {
		column(&r.White, name+".white", name+".beyond_db")
		column(&r.Pink, name+".pink", name+".pink_beyond_db")
	}
	ring(&f.PreRing, "pre_ring")
	ring(&f.PostRing, "post_ring")
	for i := range f.Bands {
		b := &f.Bands[i]
		key := fmt.Sprintf("bands[%g Hz]", b.Nominal)
		list = append(list,
			entry{&b.Gain, level, key + ".gain_db"},
			entry{&b.Arrival, plain, key + ".arrival_ms"},
			entry{&b.Spread, spread, key + ".spread_ms"},
			entry{&b.PreRing, length, key + ".pre_ring_ms"},
			entry{&b.PostRing, length, key + ".post_ring_ms"},
			entry{&b.PhaseDeviation, mean, key + ".phase_deviation_deg"})
	}
	for i := range f.Curve.Hz {
		list = append(list,
			entry{&f.Curve.Magnitude[i], level, "curve"},
			entry{&f.Curve.Phase[i], angle, "curve"},
			entry{&f.Curve.GroupDelay[i], plain, "curve"})
	}
	return list
}

// blank is figures with the same places as f, all NaN.
func blank(f *figures.Figures) *figures.Figures {
	g := *f
	g.Bands = append([]figures.BandFigures(nil), f.Bands...)
	g.Curve.Magnitude = append([]float64(nil), f.Curve.Magnitude...)
	g.Curve.Phase = append([]float64(nil), f.Curve.Phase...)
	g.Curve.GroupDelay = append([]float64(nil), f.Curve.GroupDelay...)
	g.NotStated = nil
	for _, e := range entries(&g) {
		*e.at = math.NaN()
	}
	return &g
}

// state puts the jackknife's values and intervals into the result, and takes out
// what noise swamps.
func (m *measurement) state(r *Result) {
	r.Figures, r.Errors = m.whole, blank(m.whole)
	halves := entries(r.Errors)
	var others []entry
	if m.other != nil {
		others = entries(m.other)
	}
	var parts [][]entry
	for _, p := range m.parts {
		parts = append(parts, entries(p))
	}
	for i, e := range entries(r.Figures) {
		without := make([]float64, len(parts))
		for j := range parts {
			without[j] = *parts[j][i].at
		}
		other := math.NaN()
		if others != nil {
			other = *others[i].at
		}
		if why := e.settle(without, other, halves[i].at, float64(m.p.Rate)); why != "" {
			r.notStated(e.key, why)
		}
	}
	m.dropSwamped(r)
	m.dropNoisyBands(r)
}

func (r *Result) notStated(key, why string) {
	if r.Figures.NotStated[key] == "" {
		r.Figures.NotStated[key] = why
	}
}

// settle replaces a figure by the jackknife's value and sets its half width, to which
// it adds how far the figure differs under the other continuation (NaN: nothing to
// add). It returns why the figure is not stated, or "".
func (e entry) settle(without []float64, other float64, half *float64, rate float64) (why string) {
	whole := *e.at
	if math.IsNaN(whole) || len(without) == 0 {
		return ""
	}
	if math.IsNaN(other) {
		other = whole
	}
	hides := "noise"
	jackknife := func(by func(float64) float64) (value, half float64) {
		value, half = estimate.Jackknife(by(whole), mapped(without, by))
		doubt := math.Abs(by(other) - by(whole))
		if doubt > half {
			hides = "what lies outside the probe's band"
		}
		return value, half + doubt
	}
	switch e.sort {
	case spread, smear:
		square, squareHalf := jackknife(func(x float64) float64 { return x * x })
		*e.at, *half = estimate.RootOf(square, squareHalf)
		if least := math.Sqrt(max(square, 0) + squareHalf); e.sort == smear && !(square > squareHalf) && least > nothing {
			*e.at, *half = math.NaN(), math.NaN()
			why = fmt.Sprintf("%s hides what lies under %.2g ms", hides, 1e3*least)
		}
	case level:
		energy, energyHalf := jackknife(energyAt)
		*e.at, *half, why = levelOf(energy, energyHalf, hides)
	case angle:
		*e.at, *half = jackknife(func(x float64) float64 { return whole + math.Remainder(x-whole, 360) })
		*e.at = math.Remainder(*e.at, 360)
	default:
		*e.at, *half = jackknife(func(x float64) float64 { return x })
	}
	switch e.sort {
	case length:
		*half += 0.5 / rate
		fallthrough
	case mean:
		*e.at = max(*e.at, 0)
	}
	return why
}

func energyAt(db float64) float64 { return math.Pow(10, db/10) }

func mapped(x []float64, by func(float64) float64) []float64 {
	y := make([]float64, len(x))
	for i, v := range x {
		y[i] = by(v)
	}
	return y
}

// Shares of noise beyond which a figure that rests on a share of the energy is
// noise's: a tenth of what the figure leaves out, or of the level it looks for.
const (
	noisyD90  = 0.01
	noisyD999 = 1e-4
	noisyRing = 1e-7
)

// dropSwamped takes out what the noise within the windows, ahead of the peak and
// behind it, decides.
func (m *measurement) dropSwamped(r *Result) {
	f := r.Figures
	white := m.noiseShares(func(float64) float64 { return 1 })
	pink := m.noiseShares(func(hz float64) float64 { return 1 / math.Max(hz, 20) })
	drop := func(at *float64, err *float64, key string, share, allowed float64) {
		if share > allowed {
			*at, *err = math.NaN(), math.NaN()
			r.notStated(key, fmt.Sprintf("the noise within the response's window, %.0f dB, hides it", 10*math.Log10(share)))
		}
	}
	e := r.Errors
	drop(&f.D90, &e.D90, "d90_ms", white[0]+white[1], noisyD90)
	drop(&f.D999, &e.D999, "d999_ms", white[0]+white[1], noisyD999)
	drop(&f.Lead, &e.Lead, "lead_ms", white[0], noisyRing)
	drop(&f.PreRing.White.Length, &e.PreRing.White.Length, "pre_ring.white_ms", white[0], noisyRing)
	drop(&f.PreRing.Pink.Length, &e.PreRing.Pink.Length, "pre_ring.pink_ms", pink[0], noisyRing)
	drop(&f.PostRing.White.Length, &e.PostRing.White.Length, "post_ring.white_ms", white[1], noisyRing)
	drop(&f.PostRing.Pink.Length, &e.PostRing.Pink.Length, "post_ring.pink_ms", pink[1], noisyRing)
	for i, b := range f.Bands {
		key := fmt.Sprintf("bands[%g Hz]", b.Nominal)
		ahead, behind := m.gates.lengths(m.gates.octaveOf(b.Centre), m.peak, len(m.mean))
		share := math.Pow(10, -m.snr[i]/10)
		drop(&f.Bands[i].PreRing, &e.Bands[i].PreRing, key+".pre_ring_ms", share*ahead/(ahead+behind), noisyRing)
		drop(&f.Bands[i].PostRing, &e.Bands[i].PostRing, key+".post_ring_ms", share*behind/(ahead+behind), noisyRing)
	}
	if len(m.parts) == 0 {
		m.dropUncorrected(r)
	}
}

// noiseShares are the noise's energy over the response's, under a weighting of
// frequency, ahead of the peak and behind it.
func (m *measurement) noiseShares(weight func(hz float64) float64) [2]float64 {
	var signal float64
	bins := m.gates.transform(m.mean[m.gates.from:m.gates.to])
	for k, v := range bins {
		signal += 2 * (real(v)*real(v) + imag(v)*imag(v)) * weight(m.gates.hertz(k)) / float64(m.gates.fft.Len())
	}
	var out [2]float64
	for b := range m.gates.windows {
		noise := m.gates.noise(b, func(hz float64) float64 { return m.noise.density(hz) / float64(m.repeats) * weight(hz) })
		ahead, behind := m.gates.lengths(b, m.peak, len(m.mean))
		out[0] += noise * ahead / signal
		out[1] += noise * behind / signal
	}
	return out
}

// dropUncorrected takes out, of one repeat, what noise adds to: it cannot be
// subtracted.
func (m *measurement) dropUncorrected(r *Result) {
	for _, e := range entries(r.Figures) {
		if (e.sort == spread || e.sort == smear || e.sort == level && !isGain(e.key)) && !math.IsNaN(*e.at) {
			*e.at = math.NaN()
			r.notStated(e.key, needsRepeats)
		}
	}
}

// isGain tells the levels of the response itself, to which noise adds next to
// nothing where they are stated, from those of what is hardly there.
func isGain(key string) bool {
	return len(key) > 5 && (key[:5] == "bands" || key[:5] == "curve")
}

// dropNoisyBands takes out bands too near the noise, or outside the probe.
func (m *measurement) dropNoisyBands(r *Result) {
	for i := range r.Figures.Bands {
		b, e := &r.Figures.Bands[i], &r.Errors.Bands[i]
		why := ""
		switch {
		case !m.inBand(m.bands[i]):
			why = fmt.Sprintf("the probe covers %.4g to %.4g Hz", m.p.From, m.p.To)
		case m.snr[i] < enough:
			why = fmt.Sprintf("the response is %.0f dB above the noise, less than %g", m.snr[i], enough)
		default:
			continue
		}
		nan := math.NaN()
		if !m.inBand(m.bands[i]) {
			b.Gain, e.Gain = nan, nan
		}
		for _, at := range []*float64{&b.Arrival, &b.Spread, &b.PreRing, &b.PostRing, &b.PhaseDeviation,
			&e.Arrival, &e.Spread, &e.PreRing, &e.PostRing, &e.PhaseDeviation} {
			*at = nan
		}
		r.notStated(fmt.Sprintf("bands[%g Hz]", b.Nominal), why)
	}
}
