package figures

import (
	"fmt"
	"math"

	"fettle/filter/response"
)

// Response is one measured impulse response.
type Response struct {
	H      []float64 // samples
	Origin int       // index of the aligned instant, n = 0; may lie outside H
	Rate   float64   // Hz
	// Carried says which of Bands(Rate) are carried. Nil: those within 20 dB of the strongest, by H itself.
	Carried []bool
	// Removed is the latency, in samples, that was taken out before H was
	// recorded. It counts in the group delay of the curve only.
	Removed float64
}

// Figures is what a response does to time. NaN is 'not stated'; see NotStated.
type Figures struct {
	Latency  float64 // samples, the bulk latency found, after the aligned instant
	Polarity int     // +1, -1; 0: not stated
	Bands    []BandFigures
	// DelaySpread is the greatest less the least arrival of the carried bands, s.
	DelaySpread float64
	Pink, White Smear
	D90, D999   float64 // s, shortest intervals that hold 90 % and 99.9 % of Σh²
	PreRing     Ring
	PostRing    Ring
	Lead        float64 // s, how long before the aligned instant early energy is -60 dB of all
	// PhaseDeviation is that of the worst carried band, degrees.
	PhaseDeviation float64
	// SumTest is the deepest loss over carried bands, in dB, of the aligned output mixed
	// 1:1 with the original against what magnitude alone would give: 0 or less.
	SumTest   float64
	Curve     Curve
	NotStated map[string]string // figure -> why it is absent
}

// BandFigures is one band of a response.
type BandFigures struct {
	Band
	Carried        bool
	Gain           float64 // dB, mean of |H|² over the band
	Arrival        float64 // s after the bulk latency, energy-weighted
	Spread         float64 // s, energy-weighted RMS of group delay about the arrival
	PreRing        float64 // s
	PostRing       float64 // s
	PhaseDeviation float64 // degrees
}

// carriedWithin is how far, in dB, a carried band may lie under the strongest.
const carriedWithin = 20.0

// Measure takes all figures of a response. It never fails: what a response cannot
// show is 'not stated', and a response without energy, with a sample that is not
// finite or at a rate that is not positive states nothing. Panics if r.Carried is
// neither nil nor as long as Bands(r.Rate).
func Measure(r Response) *Figures { return measure(r, 1) }

// measure is Measure with a transform refine times as long as need be.
func measure(r Response, refine int) *Figures {
	bands := Bands(r.Rate)
	if r.Carried != nil && len(r.Carried) != len(bands) {
		panic(fmt.Sprintf("figures: %d carried bands given, %d bands at %g Hz", len(r.Carried), len(bands), r.Rate))
	}
	if why := r.unusable(); why != "" {
		return nothing(why)
	}
	x, from := support(r.H)
	origin := float64(r.Origin - from)
	pink := make(chan []float64, 1)
	go func() { pink <- pinkFilter(r.Rate) }() // depends on nothing else
	f := &Figures{NotStated: map[string]string{}}
	// The spectrum is much longer than the response; it is let go before the rest.
	k := f.inFrequency(newSpectrum(x, centroid(x), r.Rate, refine), bands, r.Carried, origin, r.Removed)
	f.inTime(x, r.Rate, origin, k, <-pink)
	return f
}

// known is what the figures in time need of those in frequency.
type known struct {
	lobes    lobes
	energies []float64 // ∫|H|² df, by band
}

// inFrequency takes the figures that the transform tells.
func (f *Figures) inFrequency(s *spectrum, bands []Band, carried []bool, origin, removed float64) known {
	latency, polarity := response.BulkLatencyOf(s.x, s.h, s.size, s.rate)
	f.Latency, f.Polarity = latency-origin, polarity
	if polarity == 0 {
		f.NotStated["polarity"] = "the phase at the bulk latency is neither near 0 nor near 180 degrees, or has no common value"
	}
	s.moments()
	f.Pink, f.White = s.smear(s.pink), s.smear(s.white)
	f.Curve = s.curve(origin, removed)
	return known{s.mainLobes(), f.bands(s, bands, carried, latency, origin)}
}

// inTime takes the figures that the samples tell; pink is the filter of pink weights.
func (f *Figures) inTime(x []float64, rate, origin float64, k known, pink []float64) {
	f.D90 = float64(shortestHolding(x, 0.9)) / rate
	f.D999 = float64(shortestHolding(x, 0.999)) / rate
	weighted := newConvolver(pink, len(x))
	eachStated := func(do func(b *BandFigures, energy float64)) {
		for i, e := range k.energies {
			if b := &f.Bands[i]; !math.IsNaN(b.Arrival) {
				do(b, e)
			}
		}
	}
	ahead := newRinger(x, rate)
	f.Lead = ahead.length(origin)
	f.PreRing = ahead.ring(k.lobes, weighted)
	eachStated(func(b *BandFigures, energy float64) { b.PreRing = ahead.early(b.Band, energy) })
	if _, symmetric := response.Mirror(x); symmetric { // both sides are one
		f.PostRing = f.PreRing
		eachStated(func(b *BandFigures, _ float64) { b.PostRing = b.PreRing })
		return
	}
	behind := newRinger(reversed(x), rate)
	f.PostRing = behind.ring(k.lobes, weighted)
	eachStated(func(b *BandFigures, energy float64) { b.PostRing = behind.early(b.Band, energy) })
}

// RingsFor is the length of the post-ring alone, white and pink, in seconds: how long after
// its peak a response at a rate in Hz still holds -60 dB of its energy. NaN where Measure
// states nothing.
func RingsFor(h []float64, rate float64) (white, pink float64) {
	if (Response{H: h, Rate: rate}).unusable() != "" {
		return math.NaN(), math.NaN()
	}
	x, _ := support(h)
	behind := newRinger(reversed(x), rate)
	ring := behind.ring(lobes{}, newConvolver(pinkFilter(rate), len(x)))
	return ring.White.Length, ring.Pink.Length
}

// extreme keeps squares, and sums of squares, within the range of float64.
const extreme = 1e100

// unusable says why a response states nothing; "" when it does.
func (r Response) unusable() string {
	if !(r.Rate*response.TopOfBand > response.PinkFrom) || math.IsInf(r.Rate, 0) {
		return fmt.Sprintf("a sample rate of %g Hz leaves nothing between 20 Hz and 0.45 of the rate", r.Rate)
	}
	var largest float64
	for n, v := range r.H {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return fmt.Sprintf("sample %d of the response is %g", n, v)
		}
		largest = max(largest, math.Abs(v))
	}
	if largest == 0 {
		return "the response has no energy"
	}
	if largest < 1/extreme || largest > extreme {
		return fmt.Sprintf("the largest sample of the response is %g, too far from 1 to be squared", largest)
	}
	return ""
}

// nothing is the figures of a response that states none.
func nothing(why string) *Figures {
	nan := math.NaN()
	column := RingColumn{Level: nan, Length: nan, Beyond: [3]float64{nan, nan, nan}, MainLobe: nan}
	smear := Smear{Total: nan, Magnitude: nan, Phase: nan}
	return &Figures{
		Latency: nan, DelaySpread: nan, Pink: smear, White: smear, D90: nan, D999: nan,
		PreRing: Ring{White: column, Pink: column}, PostRing: Ring{White: column, Pink: column},
		Lead: nan, PhaseDeviation: nan, SumTest: nan,
		NotStated: map[string]string{"response": why},
	}
}

// centroid is the energy's mean index, to the half sample.
func centroid(x []float64) float64 {
	c, _ := response.Mirror(x)
	return c
}

// bands fills in what the transform tells of the bands and is taken over the carried
// ones, and gives their energies.
func (f *Figures) bands(s *spectrum, bands []Band, carried []bool, latency, origin float64) []float64 {
	samples := make([]*bandSample, len(bands))
	energies, gains := make([]float64, len(bands)), make([]float64, len(bands))
	for i, b := range bands {
		samples[i] = s.sample(b)
		energies[i] = samples[i].energy()
		gains[i] = decibels(energies[i] / b.width())
	}
	if carried == nil {
		carried = near(gains)
	}
	phase := s.phaseResidual(latency)
	floor := 10 * math.Log10(stated*s.peak)
	for i, b := range bands {
		nan := math.NaN()
		band := BandFigures{Band: b, Carried: carried[i], Gain: gains[i],
			Arrival: nan, Spread: nan, PreRing: nan, PostRing: nan, PhaseDeviation: nan}
		if gains[i] >= floor && gains[i] > None {
			mean, spread := samples[i].delay(s.faint())
			band.Arrival, band.Spread = (mean+s.mid-latency)/s.rate, spread/s.rate
			band.PhaseDeviation = phase.deviation(s, b)
		} else {
			f.NotStated[fmt.Sprintf("bands[%g Hz]", b.Nominal)] = "more than 60 dB under the maximum of the magnitude, or under -200 dB"
		}
		f.Bands = append(f.Bands, band)
	}
	f.overCarried(samples, origin)
	return energies
}

// overCarried takes delay spread, phase deviation and the sum test over the carried bands.
func (f *Figures) overCarried(samples []*bandSample, origin float64) {
	first, last := math.Inf(1), math.Inf(-1)
	worst, deepest := math.Inf(-1), math.Inf(1)
	for i, b := range f.Bands {
		if !b.Carried || math.IsNaN(b.Arrival) {
			continue
		}
		first, last = min(first, b.Arrival), max(last, b.Arrival)
		worst = max(worst, b.PhaseDeviation)
		sum, most := samples[i].mixed(origin)
		deepest = min(deepest, decibels(sum/most))
	}
	if math.IsInf(first, 1) {
		for _, key := range []string{"delay_spread", "phase_deviation", "sum_test"} {
			f.NotStated[key] = "no band is carried"
		}
		first, last, worst, deepest = math.NaN(), math.NaN(), math.NaN(), math.NaN()
	}
	f.DelaySpread, f.PhaseDeviation, f.SumTest = last-first, worst, deepest
}

// CarriedBands says which of Bands(rate) a magnitude carries: those whose gain is
// within 20 dB of the strongest. It serves a caller that judges by another
// response than the measured one: a chain without its gain, bells and shelves.
// magnitude is |H| at bins step Hz apart, from 0 to half the rate; ten bins or
// more should stand in the narrowest band, which is 4.6 Hz wide.
func CarriedBands(magnitude []float64, step, rate float64) []bool {
	bands := Bands(rate)
	gains := make([]float64, len(bands))
	for i, b := range bands {
		var energy float64
		response.EachBin(step, b.Lower, b.Upper, func(k int, width float64) {
			energy += width * magnitude[k] * magnitude[k]
		})
		gains[i] = decibels(energy / b.width())
	}
	return near(gains)
}

// near marks the gains within 20 dB of the greatest.
func near(gains []float64) []bool {
	strongest := math.Inf(-1)
	for _, g := range gains {
		strongest = max(strongest, g)
	}
	carried := make([]bool, len(gains))
	for i, g := range gains {
		carried[i] = g >= strongest-carriedWithin
	}
	return carried
}
