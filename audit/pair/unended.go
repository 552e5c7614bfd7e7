package pair

import (
	"fmt"
	"math"

	"fettle/audit/estimate"
	"fettle/audit/figures"
	"fettle/filter/response"
)

const (
	// endShare is the part of a response to either side that is looked at for whether it
	// has come to an end.
	endShare = 4
	// endStandsOut is how many times the scatter's energy the end must hold to be response.
	endStandsOut = 4.0
	// ofHann is the energy that a Hann window leaves.
	ofHann = 0.375
)

// late is, for each band, about how many seconds later it would arrive if the response were
// not cut off where it is looked at no further: the energy that it still has there, as far
// as that stands out of the scatter of the groups, times how late that is.
func (c *channel) late(rate float64) []float64 {
	bands := figures.Bands(rate)
	all := bandEnergies(c.h, bands, rate)
	ends := c.endEnergies(c.h, bands, rate)
	mean := make([]float64, len(c.h))
	for _, p := range c.parts {
		for i, v := range p {
			mean[i] += v / float64(len(c.parts))
		}
	}
	scatter := make([]float64, len(bands))
	for _, p := range c.parts {
		off := make([]float64, len(p))
		for i, v := range p {
			off[i] = v - mean[i]
		}
		for b, e := range c.endEnergies(off, bands, rate) {
			scatter[b] += e * float64(len(c.parts)-1) / float64(len(c.parts))
		}
	}
	out := make([]float64, len(bands))
	for b := range out {
		if ends[b] > endStandsOut*scatter[b] && all[b] > 0 {
			out[b] = (ends[b] - scatter[b]) / ofHann / all[b] * c.reach(rate)
		}
	}
	return out
}

// reach is how long a response is looked at to either side, in seconds.
func (c *channel) reach(rate float64) float64 { return float64(len(c.h)/2) / rate }

// endEnergies are those of both ends of a response.
func (c *channel) endEnergies(h []float64, bands []figures.Band, rate float64) []float64 {
	n := len(h) / 2 / endShare
	out := make([]float64, len(bands))
	for _, end := range [][]float64{h[:n], h[len(h)-n:]} {
		x := make([]float64, n)
		for i, v := range end {
			x[i] = v * (0.5 - 0.5*math.Cos(2*math.Pi*(float64(i)+0.5)/float64(n)))
		}
		for b, e := range bandEnergies(x, bands, rate) {
			out[b] += e
		}
	}
	return out
}

// bandEnergies are the energies of x in bands.
func bandEnergies(x []float64, bands []figures.Band, rate float64) []float64 {
	size := response.NextPow2(max(2*len(x), int(rate)))
	bins := response.Spectrum(x, size)
	out := make([]float64, len(bands))
	for b, band := range bands {
		lo, hi := int(math.Ceil(band.Lower*float64(size)/rate)), int(band.Upper*float64(size)/rate)
		for _, v := range bins[lo : hi+1] {
			out[b] += estimate.Power(v)
		}
	}
	return out
}

const (
	// resolved is how many times finer than a band what is looked at must resolve it: a
	// notch in it may ring for longer, and the response found is then a smooth one.
	resolved = 4.0
	// wellAfter in seconds is how late a band must be for what was cut off to disturb others.
	wellAfter = 1e-4
	// longestRing in seconds is how late what such a smooth response does not explain may be.
	longestRing = 1.0
)

// whyUnended is why a band's times are not stated, or "". It adds to the interval what the
// response found may leave out.
func (b *Band) whyUnended(late, reach float64) (why string) {
	if !(late <= b.ArrivalErr) {
		nan := math.NaN()
		b.Arrival, b.ArrivalErr, b.Spread, b.SpreadErr = nan, nan, nan, nan
		return fmt.Sprintf("the response still goes on %.0f ms from its middle, as far as it is looked at in recordings of this length", 1e3*reach)
	}
	b.ArrivalErr += late
	if (b.Upper-b.Lower)*reach < resolved {
		b.ArrivalErr += max(1-b.Coherence, 0) * longestRing
	}
	return ""
}

// middle is a response of which only the inner half is left, with faded ends.
func middle(h []float64) []float64 {
	out := make([]float64, len(h))
	for i := range h {
		u := math.Abs(float64(2*i+1)/float64(len(h)) - 1) // 0 in the middle, 1 at the ends
		out[i] = h[i] * math.Pow(math.Cos(math.Pi/2*min(max(4*u-1, 0), 1)), 2)
	}
	return out
}

// doubtArrival adds to the interval what the outer half of the response moves.
func (b *Band) doubtArrival(inner float64) { b.ArrivalErr += math.Abs(b.Arrival - inner) }

// doubtSpread takes out a spread that is decided by the outer half of the response, where
// next to nothing but noise is.
func (b *Band) doubtSpread(inner float64) {
	if math.Abs(b.Spread-inner) > b.SpreadErr {
		b.Spread, b.SpreadErr = math.NaN(), math.NaN()
	}
}
