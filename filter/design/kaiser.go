package design

import (
	"fmt"
	"math"

	"fettle/filter/response"
)

const (
	refinedTaps = 1 << 14 // up to here the window's shape is searched as well
	exactTaps   = 1 << 16 // up to here the search ends at the least odd length
)

// Kaiser returns the shortest windowed-sinc kernel found that meets the mask:
// an odd number of taps, symmetric (type I: an even number would force a zero
// at half the rate), delay (n-1)/2. Each transition is at -6 dB in its middle;
// the narrowest one governs the length.
//
// Kaiser's formula gives a first length and window; both are then searched by
// measuring, and the result is measured once more on a dense grid. The length
// is the least odd one in the sense that two taps fewer fail with the best
// window shape; above 2^14 taps the shape is the formula's, above 2^16 the
// length is within 0.1 % of the least.
//
// Every low-pass in the making has a gain of 1 at 0 Hz. So the taps of a
// low-pass and band-stop sum to 1, those of a high-pass and band-pass to 0 (to
// about 1e-17): 0 Hz is nulled, and the mask is met with that condition.
//
// Errors: what Validate reports; more than 2^22 taps needed; a mask that no
// length near the estimate meets. Source: Kaiser (1974); Oppenheim & Schafer,
// section on filter design by windowing.
func Kaiser(m Mask) ([]float64, error) {
	if err := m.Validate(); err != nil {
		return nil, fmt.Errorf("kaiser %v: %w", m.Kind, err)
	}
	attenuation := -toDB(math.Min(1-fromDB(-m.RippleDB), fromDB(-m.RejectDB)))
	estimate := KaiserOrder(attenuation, 2*math.Pi*m.Narrowest()/m.Rate)
	if !(estimate < MaxTaps) {
		return nil, tooLong(m, estimate)
	}
	s := kaiserSearch{mask: m, beta: KaiserBeta(attenuation)}
	n := s.leastLength(2*int(estimate/2) + 1)
	if n > MaxTaps {
		return nil, tooLong(m, float64(n))
	}
	return s.confirmed(n)
}

func tooLong(m Mask, taps float64) error {
	return fmt.Errorf("kaiser %v: a transition of %g Hz with %g dB of rejection needs about %.0f taps, more than %d; widen the transition, lower the rejection, or use iir",
		m.Kind, m.Narrowest(), m.RejectDB, taps, MaxTaps)
}

// kaiserSearch looks for the shortest kernel. Its yardstick is the excess: the
// deviation from the ideal over the allowed one, worst of all edges.
type kaiserSearch struct {
	mask Mask
	beta float64 // the formula's window shape
}

// leastLength brackets the border between failing and meeting lengths, odd
// both, and halves the bracket.
func (s kaiserSearch) leastLength(start int) int {
	step := 2 * max(1, start/128)
	fails, meets := start, start
	if s.meets(start) {
		for fails = start - step; fails >= 1 && s.meets(fails); fails -= step {
			meets = fails
		}
		fails = max(fails, -1)
	} else {
		for meets = start + step; meets <= MaxTaps && !s.meets(meets); meets += step {
			fails = meets
			step *= 2
		}
	}
	resolution := 2
	if meets > exactTaps {
		resolution = 2 * (meets / 2048)
	}
	for meets-fails > resolution {
		middle := fails + (meets-fails)/4*2
		if s.meets(middle) {
			meets = middle
		} else {
			fails = middle
		}
	}
	return meets
}

func (s kaiserSearch) meets(n int) bool {
	return s.bestShape(n).excess <= 1
}

// trial is a window shape with the excess it leaves.
type trial struct{ beta, excess float64 }

// try measures a shape, no further than until its excess is over the limit.
func (s kaiserSearch) try(n int, beta, limit float64) trial {
	return trial{beta, s.excess(n, beta, limit)}
}

func (a trial) better(b trial) trial {
	if b.excess < a.excess {
		return b
	}
	return a
}

// bestShape returns the window shape of least excess at a length, stopping at
// the first that is good enough: the formula's, then a scan around it (the
// excess is the worst of many ripples and has several dips), then a golden
// section about the best of the scan.
func (s kaiserSearch) bestShape(n int) trial {
	best := s.try(n, s.beta, math.Inf(1))
	if best.excess <= 1 || n > refinedTaps {
		return best
	}
	const steps = 12
	lo, hi := math.Max(0, 0.8*s.beta-0.5), 1.1*s.beta+0.5
	for i := 0; i <= steps && best.excess > 1; i++ {
		best = best.better(s.try(n, lo+(hi-lo)*float64(i)/steps, best.excess))
	}
	// A ripple changes by 9 dB for each 1 of beta (KaiserBeta), so by 1.2 dB or
	// 1.15 over half a step: no dip between two steps is deeper.
	if best.excess > 1.15 {
		return best
	}
	width := (hi - lo) / steps
	return s.golden(n, best, math.Max(0, best.beta-width), best.beta+width)
}

func (s kaiserSearch) golden(n int, best trial, lo, hi float64) trial {
	const ratio = 0.6180339887498949
	try := func(beta float64) trial { return s.try(n, beta, math.Inf(1)) }
	left, right := try(hi-ratio*(hi-lo)), try(lo+ratio*(hi-lo))
	for range 10 {
		best = best.better(left).better(right)
		if best.excess <= 1 {
			break
		}
		if left.excess < right.excess {
			hi, right = right.beta, left
			left = try(hi - ratio*(hi-lo))
		} else {
			lo, left = left.beta, right
			right = try(lo + ratio*(hi-lo))
		}
	}
	return best
}

// excess reads the kernel's gain where a windowed sinc errs most: on each edge
// and over the next four ripples inwards, sixteen points to a ripple with
// parabolas laid through them.
func (s kaiserSearch) excess(n int, beta, limit float64) float64 {
	half := kaiserKernel(s.mask, n, beta)[n/2:]
	half[0] /= 2
	worst := 0.0
	var last, before [4]float64 // by edge, pass and stop
	for j := 0; j <= 64 && worst <= limit; j++ {
		away := float64(j) * s.mask.Rate / float64(16*n)
		for i, hz := range s.inwards(away) {
			now := s.errorAt(half, hz)
			worst = math.Max(worst, now)
			if j >= 2 {
				worst = math.Max(worst, vertex(before[i], last[i], now))
			}
			before[i], last[i] = last[i], now
		}
	}
	return worst * (1 + 1e-9) // so that rounding decides nothing later
}

// inwards lists the frequencies that lie so many Hz inside each edge's band.
func (s kaiserSearch) inwards(away float64) []float64 {
	if !s.mask.Kind.passesDC() {
		away = -away
	}
	list := make([]float64, 0, 4)
	for i := range s.mask.edges() {
		list = append(list, s.mask.Pass[i]-away, s.mask.Stop[i]+away)
		away = -away
	}
	return list
}

// errorAt returns the deviation at hz over the allowed one, 0 outside the
// bands.
func (s kaiserSearch) errorAt(half []float64, hz float64) float64 {
	if hz < 0 || hz > s.mask.Rate/2 {
		return 0
	}
	gain := 2 * real(response.TapsAt(half, 2*math.Pi*hz/s.mask.Rate))
	switch s.mask.regionAt(hz) {
	case passband:
		return math.Max((gain-1)/(fromDB(s.mask.RippleDB)-1), (1-gain)/(1-fromDB(-s.mask.RippleDB)))
	case stopband:
		return math.Abs(gain) / fromDB(-s.mask.RejectDB)
	}
	return 0
}

// confirmed measures the whole response and, until it is within the mask, takes
// a little more length and a window for 0.1 dB more: the search saw the
// neighbourhood of the edges only.
func (s kaiserSearch) confirmed(n int) ([]float64, error) {
	const attempts = 16
	var got Measured
	for range attempts {
		taps := kaiserKernel(s.mask, n, s.bestShape(n).beta)
		if got = MeasureTaps(taps, s.mask); got.Meets(s.mask) {
			return taps, nil
		}
		n += 2 * max(1, n/2048)
		s.beta += 0.1 * 0.1102
	}
	return nil, fmt.Errorf("kaiser %v: %d taps reach a ripple of %.4g dB and a rejection of %.4g dB where %g dB and %g dB are asked; widen the transition or lower the rejection",
		s.mask.Kind, n, got.RippleDB, got.RejectDB, s.mask.RippleDB, s.mask.RejectDB)
}

// kaiserKernel builds the kind from low-passes of unit gain at 0 Hz, cut in the
// middle of each transition. n is odd.
func kaiserKernel(m Mask, n int, beta float64) []float64 {
	window := KaiserWindow(n, beta)
	taps := make([]float64, n)
	total := 0.0
	sign := 1.0
	if !m.Kind.passesDC() {
		sign = -1
	}
	for i := range m.edges() {
		low := make([]float64, n)
		addIdeal(low, window, (m.Pass[i]+m.Stop[i])/m.Rate, 1)
		gain := sign / compensatedSum(low)
		for j, h := range low {
			taps[j] += gain * h
		}
		total += sign
		sign = -sign
	}
	if m.Kind == Highpass || m.Kind == Bandstop {
		taps[n/2]++
		total++
	}
	taps[n/2] += total - compensatedSum(taps)
	return taps
}

// compensatedSum adds with a running correction (Neumaier 1974), so that the
// result is rounded about once.
func compensatedSum(x []float64) float64 {
	sum, correction := 0.0, 0.0
	for _, v := range x {
		next := sum + v
		if math.Abs(sum) >= math.Abs(v) {
			correction += (sum - next) + v
		} else {
			correction += (v - next) + sum
		}
		sum = next
	}
	return sum + correction
}
