package audio

import "math"

// bounds says how far the interpolator can reach, so that the meter need not run
// it where it cannot beat the peak so far.
//
// Write a phase as its taps h. Any few taps g in the middle of the window that
// agree with h on constants and on ramps leave taps h - g with two zeros at z = 1:
// they are some taps r applied to the second differences Δ²x. Hence
//
//	|h·x - g·x| <= Σ|r| max|Δ²x|
//
// over the window. With s0, s1, s2 the sums of the three pairs in the middle, the
// inner one first, and d0 the difference of that one,
//
//	g·x = a s0 + b s1 + c s2, a + b + c = 1/2    at n + 2/4
//	g·x = a s0 + b s1 + c s2 ± t d0              at n + 1/4, n + 3/4
//
// where t is the distance of the phase's centre of gravity from the middle. As s1
// is s0, and s2 is s0 + 2 (s1 - s0), up to two second differences each,
//
//	g·x = s0/2 ± t d0 + (b + 2c) (s1 - s0) + c (s2 - 2 s1 + s0)
//
// The first two terms lie on the straight line between the inner pair, since t <=
// 1/2. So no point exceeds the larger of that pair by more than
//
//	(Σ|r| + 2|b + 2c| + 2|c|) max|Δ²x|
type bounds struct {
	norm               float64    // the largest |point| / max|x|
	lift               float64    // the largest (|point| - max|inner pair|) / max|Δ²x|
	near               [3]float64 // a, b, c
	tilt               float64    // t, with its sign
	middleOff, sideOff float64    // Σ|r|
}

// rounding is more than all roundings together can add to a point or to a bound
// of it, relative to the largest sample: in r, 24 values of two running sums of 24
// terms, each rounded by 2^-53 at the most, act on second differences up to 4,
// which makes 5e-13; the rest are fewer than 100 operations, with weights that sum
// to less than 5: 6e-14. It holds for samples down to 1e-290, below which products
// begin to lose more.
const rounding = 1e-12

// The free ones of the taps g. Any values are right; these leave about the
// smallest Σ|r|, for three pairs that serve all phases.
const (
	nearNext  = -0.16  // b
	nearOuter = +0.035 // c
)

func newBounds(quarter, middle window) (b bounds) {
	b.norm = max(magnitudes(quarter[:]), magnitudes(middle[:])) * (1 + rounding)
	b.near = [...]float64{0.5 - nearNext - nearOuter, nearNext, nearOuter}
	b.tilt = -slope(quarter)
	b.middleOff = magnitudes(remainder(middle, b.near, 0))
	b.sideOff = magnitudes(remainder(quarter, b.near, b.tilt))
	b.lift = max(b.middleOff, b.sideOff) + 2*math.Abs(nearNext+2*nearOuter) + 2*math.Abs(nearOuter)
	return b
}

// slope is what a phase makes of the ramp that is 0 in the middle of the window.
func slope(h window) (sum float64) {
	for k, c := range h {
		sum += c * (float64(k) - (interpolatorTaps-1)/2.)
	}
	return sum
}

// remainder is r, one for each second difference: h - g divided by (1 - z)²,
// which is two running sums. The last two entries are 0 up to rounding.
func remainder(h window, near [3]float64, tilt float64) []float64 {
	r, n := h, len(h)/2
	for k, c := range near {
		r[n-1-k] -= c
		r[n+k] -= c
	}
	r[n-1] -= tilt
	r[n] += tilt
	for range 2 {
		for k := 1; k < len(r); k++ {
			r[k] += r[k-1]
		}
	}
	return r[:]
}

func magnitudes(h []float64) float64 {
	sum := 0.
	for _, c := range h {
		sum += math.Abs(c)
	}
	return sum
}
