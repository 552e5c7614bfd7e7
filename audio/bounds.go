package audio

import "math"

// bounds says how far the interpolator can reach, so that the meter need not run
// it where it cannot beat the peak so far.
//
// Write a phase as its taps h, and let some taps g in the middle of the window, a
// sketch of it, stand for them. Then, over the window,
//
//	|h·x - g·x| <= Σ|h - g| max|x|
//
// which is good for noise, with the taps of h themselves. If g agrees with h on
// constants and on ramps, h - g has two zeros at z = 1: it is some taps r applied
// to the second differences Δ²x. Hence
//
//	|h·x - g·x| <= Σ|r| max|Δ²x|
//
// which is good for low frequencies. If g is the straight line between the inner
// pair, g·x is not larger than the larger of the pair: no point exceeds that by more
// than Σ|r| max|Δ²x|.
//
// As the interpolator does, a sketch works on the sums and differences of mirrored
// samples.
type bounds struct {
	norm        float64 // the largest |point| / max|x|
	lift        float64 // the largest (|point| - max|inner pair|) / max|Δ²x|
	rough, bent sketch  // for noise, and for low frequencies
}

// nearPairs is how many pairs in the middle of a window a sketch takes. Two leave
// four times as many windows of white noise to the interpolator; four take longer
// than they spare.
const nearPairs = 3

// sketch stands for the phases, its coefficients the outer pair first. A point is
// off by no more than its off times max|x|, or times max|Δ²x|.
type sketch struct {
	middle, even, odd  [nearPairs]float64
	middleOff, sideOff float64
}

// slacks is how far a sketch may be off.
type slacks struct{ middle, side float64 }

// most is above every point of windows where max|x| is reach and max|Δ²x| is bend.
func (b *bounds) most(reach, bend float64) float64 {
	return min(b.norm*reach, reach+b.lift*bend+rounding*reach)
}

// sketch returns the one that is off by less in a window where max|x| is reach and
// max|Δ²x| is bend.
func (b *bounds) sketch(reach, bend float64) (*sketch, slacks) {
	s, of := &b.rough, reach
	if b.bent.middleOff*bend < b.rough.middleOff*reach {
		s, of = &b.bent, bend
	}
	return s, slacks{s.middleOff*of + rounding*reach, s.sideOff*of + rounding*reach}
}

// rounding is more than all roundings together can add to a point or to a bound
// of it, relative to the largest sample: in r, 24 values of two running sums of 24
// terms, each rounded by 2^-53 at the most, act on second differences up to 4,
// which makes 5e-13; the rest are fewer than 100 operations, with weights that sum
// to less than 5: 6e-14. It holds for samples down to 1e-290, below which products
// begin to lose more.
const rounding = 1e-12

// The free coefficients of the bent sketch. Any values are right; these leave about
// the smallest Σ|r|.
const (
	middleOuter, middleNext = +0.0417, -0.1755
	evenOuter, evenNext     = +0.0300, -0.1282
	oddOuter, oddNext       = +0.0040, -0.0241
)

func newBounds(h *interpolate, quarter, middle window) (b bounds) {
	b.norm = max(magnitudes(quarter[:]), magnitudes(middle[:])) * (1 + rounding)
	b.rough = sketch{middle: h.middle.near(), even: h.even.near(), odd: h.odd.near()}
	b.rough.measure(quarter, middle, difference)

	tilt := -slope(quarter)
	b.bent.middle = [...]float64{middleOuter, middleNext, 0.5 - middleNext - middleOuter}
	b.bent.even = [...]float64{evenOuter, evenNext, 0.5 - evenNext - evenOuter}
	b.bent.odd = [...]float64{oddOuter, oddNext, tilt - 3*oddNext - 5*oddOuter}
	b.bent.measure(quarter, middle, remainder)

	constant := [...]float64{0, 0, 0.5}
	straight := sketch{middle: constant, even: constant, odd: [...]float64{0, 0, tilt}}
	straight.measure(quarter, middle, remainder)
	b.lift = max(straight.middleOff, straight.sideOff)
	return b
}

// near are the coefficients that a sketch takes over.
func (h half) near() [nearPairs]float64 { return [nearPairs]float64(h[len(h)-nearPairs:]) }

// measure sets the offs, the sums of the magnitudes that off makes of a phase and
// its sketch.
func (s *sketch) measure(quarter, middle window, off func(h, g window) window) {
	between, beside := off(middle, taps(s.middle, [nearPairs]float64{})), off(quarter, taps(s.even, s.odd))
	s.middleOff, s.sideOff = magnitudes(between[:]), magnitudes(beside[:])
}

// taps is what coefficients of sums and differences are on the samples themselves.
func taps(even, odd [nearPairs]float64) (g window) {
	const first = interpolatorTaps/2 - nearPairs
	for i := range even {
		g[first+i] = even[i] + odd[i]
		g[interpolatorTaps-1-first-i] = even[i] - odd[i]
	}
	return g
}

func difference(h, g window) window {
	for k := range h {
		h[k] -= g[k]
	}
	return h
}

// remainder is r, one for each second difference: h - g divided by (1 - z)²,
// which is two running sums. The last two entries are 0 up to rounding.
func remainder(h, g window) window {
	r := difference(h, g)
	for range 2 {
		for k := 1; k < len(r); k++ {
			r[k] += r[k-1]
		}
	}
	return r
}

// slope is what a phase makes of the ramp that is 0 in the middle of the window.
func slope(h window) (sum float64) {
	for k, c := range h {
		sum += c * (float64(k) - (interpolatorTaps-1)/2.)
	}
	return sum
}

func magnitudes(h []float64) float64 {
	sum := 0.
	for _, c := range h {
		sum += math.Abs(c)
	}
	return sum
}
