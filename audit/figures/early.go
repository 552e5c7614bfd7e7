package figures

import (
	"math"
	"math/cmplx"
)

// None is the level, in dB, of what is not there: everything under it reads so.
const None = -200.0

// BeyondTimes are the times, in seconds, at which early and late energy are always stated.
var BeyondTimes = [3]float64{0.002, 0.005, 0.020}

// Ring is the early (late) energy of a response.
type Ring struct{ White, Pink RingColumn }

// RingColumn is the early (late) energy under one weighting.
type RingColumn struct {
	Level    float64    // dB, P at the main lobe's half width
	Length   float64    // s, the largest t with P(t) >= -60 dB; 0 if none
	Beyond   [3]float64 // dB, P at BeyondTimes
	MainLobe float64    // s, the main lobe's half width
}

// lengthThreshold is -60 dB.
const lengthThreshold = 1e-6

// samePeak is how near the largest a sample must come to be a peak too: rounding
// must not decide between the two equal peaks of an antisymmetric kernel.
const samePeak = 1 - 1e-9

// profile is how the energy of a response gathers in time.
type profile struct {
	rate   float64
	before []float64 // before[n]: energy of the samples ahead of sample n
	peak   float64   // index of the peak of |x|; half way from the first to the last of equal peaks
}

func newProfile(x []float64, rate float64) *profile {
	p := &profile{rate: rate, before: make([]float64, len(x)+1)}
	var largest float64
	for n, v := range x {
		p.before[n+1] = p.before[n] + v*v
		largest = max(largest, math.Abs(v))
	}
	first, last := -1, 0
	for n, v := range x {
		if math.Abs(v) >= samePeak*largest {
			last = n
			if first < 0 {
				first = n
			}
		}
	}
	p.peak = float64(first+last) / 2
	return p
}

// total is the energy of the whole response.
func (p *profile) total() float64 { return p.before[len(p.before)-1] }

// aheadOf is the energy of the samples earlier than the index at.
func (p *profile) aheadOf(at float64) float64 {
	// A sample exactly at the index is not earlier, whatever the rounding of t·fs.
	n := int(math.Ceil(at - 1e-6))
	return p.before[min(max(n, 0), len(p.before)-1)]
}

// early is P(t) in dB, t in seconds.
func (p *profile) early(t float64) float64 {
	return decibels(p.aheadOf(p.peak-t*p.rate) / p.total())
}

// length is how long before the index at, in seconds, early energy still is -60 dB of all.
func (p *profile) length(at float64) float64 {
	return max(0, at-float64(p.reaches(lengthThreshold*p.total()))) / p.rate
}

// reaches is the index of the sample with which the energy comes to the given level.
func (p *profile) reaches(energy float64) int {
	for n, e := range p.before {
		if e >= energy {
			return max(n-1, 0)
		}
	}
	return len(p.before) - 1
}

// column reads one weighting's figures off the profile.
func (p *profile) column(lobe float64) RingColumn {
	c := RingColumn{Level: p.early(lobe), Length: p.length(p.peak), MainLobe: lobe}
	for i, t := range BeyondTimes {
		c.Beyond[i] = p.early(t)
	}
	return c
}

// decibels is 10 lg of an energy ratio, no less than None.
func decibels(ratio float64) float64 { return max(None, 10*math.Log10(ratio)) }

// lobes are half widths of main lobes, in seconds: of the response as it is and under
// pink weights.
type lobes struct{ white, pink float64 }

// mainLobes are those of the zero-phase response whose magnitude is |H|, weighted: up
// to where its energy-time curve (the squared analytic signal; Heyser 1967, Journal of
// the Audio Engineering Society 15) has its first minimum or is 20 dB down, whichever
// is nearer, to the sample.
func (s *spectrum) mainLobes() lobes {
	const stride = 4 // the curves are needed near their peaks only
	n := s.size / stride
	both := func(k int) complex128 { // the white magnitude and, as imaginary part, the pink
		m := math.Sqrt(power(s.h[k*stride]))
		if k == 0 || k == n/2 {
			m /= 2 // DC and the highest bin stand on both sides
		}
		return complex(m, m*pinkMagnitude(float64(k*stride)*s.step))
	}
	const first, factor = 1 << 11, 4
	for reach := first; ; reach *= factor {
		sum := aroundZero(both, n, min(reach, n))
		white, pink := separate(sum)
		w, p := halfWidth(white), halfWidth(pink)
		if len(sum) == n && w < 0 {
			w = n / 2
		}
		if len(sum) == n && p < 0 {
			p = n / 2
		}
		if w >= 0 && p >= 0 {
			return lobes{float64(w) / s.rate, float64(p) / s.rate}
		}
	}
}

// separate undoes the sum of one transform and j times another, both of real sequences;
// it gives their squared moduli from 0 on.
func separate(sum []complex128) (a, b []float64) {
	n := len(sum)
	a, b = make([]float64, n/2), make([]float64, n/2)
	for i := range a {
		mirrored := cmplx.Conj(sum[(n-i)%n])
		a[i], b[i] = power(sum[i]+mirrored)/4, power(sum[i]-mirrored)/4
	}
	return a, b
}

// halfWidth is the first index at which a curve has a minimum or is 20 dB under its
// beginning; -1 if there is none.
func halfWidth(curve []float64) int {
	for i := 1; i+1 < len(curve); i++ {
		if curve[i] <= 0.01*curve[0] || curve[i] <= curve[i+1] {
			return i
		}
	}
	return -1
}
