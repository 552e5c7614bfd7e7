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
	s := kaiserSearch{mask: m, beta: KaiserBeta(attenuation),
		above: fromDB(m.RippleDB) - 1, below: 1 - fromDB(-m.RippleDB), stop: fromDB(-m.RejectDB)}
	n, shape := s.leastLength(2*int(estimate/2) + 1)
	if n > MaxTaps {
		return nil, tooLong(m, float64(n))
	}
	return s.confirmed(n, shape)
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

	above, below, stop float64 // allowed deviations: in the passband from 1, in the stopband
}

// leastLength brackets the border between failing and meeting lengths, odd
// both, and halves the bracket. shape is the best window's at the length.
func (s kaiserSearch) leastLength(start int) (n int, shape trial) {
	meet := func(n int) bool {
		best := s.bestShape(n)
		if best.excess <= 1 {
			shape = best
		}
		return best.excess <= 1
	}
	step := 2 * max(1, start/128)
	fails, meets := start, start
	if meet(start) {
		for fails = start - step; fails >= 1 && meet(fails); fails -= step {
			meets = fails
		}
		fails = max(fails, -1)
	} else {
		for meets = start + step; meets <= MaxTaps && !meet(meets); meets += step {
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
		if meet(middle) {
			meets = middle
		} else {
			fails = middle
		}
	}
	return meets, shape
}

// trial is a window shape with the excess it leaves.
type trial struct{ beta, excess float64 }

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
	length := s.ofLength(n)
	if n > refinedTaps {
		return length.try(s.beta, 1)
	}
	best := length.try(s.beta, math.Inf(1))
	if best.excess <= 1 {
		return best
	}
	const steps = 12
	lo, hi := math.Max(0, 0.8*s.beta-0.5), 1.1*s.beta+0.5
	for i := 0; i <= steps && best.excess > 1; i++ {
		best = best.better(length.try(lo+(hi-lo)*float64(i)/steps, best.excess))
	}
	// A ripple changes by 9 dB for each 1 of beta (KaiserBeta), so by 1.2 dB or
	// 1.15 over half a step: no dip between two steps is deeper.
	if best.excess > 1.15 {
		return best
	}
	width := (hi - lo) / steps
	return length.golden(best, math.Max(0, best.beta-width), best.beta+width)
}

// lengthSearch tries window shapes on kernels of one length.
type lengthSearch struct {
	kaiserSearch
	sincs *kaiserSincs
}

func (s kaiserSearch) ofLength(n int) lengthSearch {
	return lengthSearch{s, newKaiserSincs(s.mask, n)}
}

// try measures a shape, no further than until its excess is over the limit.
func (l lengthSearch) try(beta, limit float64) trial {
	return trial{beta, l.excess(beta, limit)}
}

func (l lengthSearch) golden(best trial, lo, hi float64) trial {
	const ratio = 0.6180339887498949
	left := l.try(hi-ratio*(hi-lo), math.Inf(1))
	right := l.try(lo+ratio*(hi-lo), left.excess)
	for range 10 {
		best = best.better(left).better(right)
		if best.excess <= 1 {
			break
		}
		// The worse of the two is dropped, so it need not be known how much worse it is.
		if left.excess < right.excess {
			hi, right = right.beta, left
			left = l.try(hi-ratio*(hi-lo), right.excess)
		} else {
			lo, left = left.beta, right
			right = l.try(lo+ratio*(hi-lo), left.excess)
		}
	}
	return best
}

// excess reads the kernel's gain where a windowed sinc errs most: on each edge
// and over the next four ripples inwards, sixteen points to a ripple with
// parabolas laid through them.
func (l lengthSearch) excess(beta, limit float64) float64 {
	half := l.sincs.half(beta)
	half[0] /= 2
	const points = 64
	worst := 0.0
	var last, before [4]float64 // by edge, pass and stop
	for j := 0; j <= points && worst <= limit; j++ {
		for i, now := range l.errorsAt(half, float64(j)*l.mask.Rate/float64(16*l.sincs.n)) {
			worst = math.Max(worst, now)
			if j >= 2 {
				worst = math.Max(worst, vertex(before[i], last[i], now))
			}
			before[i], last[i] = last[i], now
		}
	}
	return worst * (1 + 1e-9) // so that rounding decides nothing later
}

// errorsAt are the errors at the points that lie so many Hz inside each edge's band.
func (l lengthSearch) errorsAt(half []float64, away float64) []float64 {
	hz := l.inwards(away)
	omegas, gains, errors := make([]float64, len(hz)), make([]complex128, len(hz)), make([]float64, len(hz))
	for i, f := range hz {
		omegas[i] = 2 * math.Pi * f / l.mask.Rate
	}
	response.TapsAtEach(gains, half, omegas)
	for i, f := range hz {
		errors[i] = l.errorOf(2*real(gains[i]), f)
	}
	return errors
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

// errorOf returns the deviation of a gain at hz over the allowed one, 0 outside the
// bands.
func (s kaiserSearch) errorOf(gain, hz float64) float64 {
	if hz < 0 || hz > s.mask.Rate/2 {
		return 0
	}
	switch s.mask.regionAt(hz) {
	case passband:
		return math.Max((gain-1)/s.above, (1-gain)/s.below)
	case stopband:
		return math.Abs(gain) / s.stop
	}
	return 0
}

// confirmed measures the whole response and, until it is within the mask, takes
// a little more length and a window for 0.1 dB more: the search saw the
// neighbourhood of the edges only.
func (s kaiserSearch) confirmed(n int, shape trial) ([]float64, error) {
	const attempts = 16
	var got Measured
	for range attempts {
		taps := kaiserKernel(s.mask, n, shape.beta)
		if got = MeasureTaps(taps, s.mask); got.Meets(s.mask) {
			return taps, nil
		}
		n += 2 * max(1, n/2048)
		s.beta += 0.1 * 0.1102
		shape = s.bestShape(n)
	}
	return nil, fmt.Errorf("kaiser %v: %d taps reach a ripple of %.4g dB and a rejection of %.4g dB where %g dB and %g dB are asked; widen the transition or lower the rejection",
		s.mask.Kind, n, got.RippleDB, got.RejectDB, s.mask.RippleDB, s.mask.RejectDB)
}

// kaiserKernel builds the kind from low-passes of unit gain at 0 Hz, cut in the
// middle of each transition. n is odd.
func kaiserKernel(m Mask, n int, beta float64) []float64 {
	taps := make([]float64, n)
	for j, h := range newKaiserSincs(m, n).half(beta) {
		taps[n/2-j], taps[n/2+j] = h, h
	}
	return taps
}

// kaiserSincs is what kernels of one length have in common. Halves of kernels begin with
// the middle.
type kaiserSincs struct {
	mask  Mask
	n     int
	sincs [][]float64 // one an edge, without the cutoff's factor
}

func newKaiserSincs(m Mask, n int) *kaiserSincs {
	k := &kaiserSincs{mask: m, n: n}
	for i := range m.edges() {
		sincs := make([]float64, n/2+1)
		for j := range sincs {
			sincs[j] = sinc(k.cutoff(i) * float64(j))
		}
		k.sincs = append(k.sincs, sincs)
	}
	return k
}

// cutoff is the middle of a transition as a fraction of half the rate.
func (k *kaiserSincs) cutoff(edge int) float64 {
	return (k.mask.Pass[edge] + k.mask.Stop[edge]) / k.mask.Rate
}

// half is the kernel under the window of shape beta.
func (k *kaiserSincs) half(beta float64) []float64 {
	window := kaiserHalf(k.n, beta)
	taps, low := make([]float64, len(window)), make([]float64, len(window))
	total, sign := 0.0, 1.0
	if !k.mask.Kind.passesDC() {
		sign = -1
	}
	for i, sincs := range k.sincs {
		cutoff := k.cutoff(i)
		for j, w := range window {
			low[j] = w * cutoff * sincs[j]
		}
		gain := sign / evenSum(low)
		for j, h := range low {
			taps[j] += gain * h
		}
		total += sign
		sign = -sign
	}
	if k.mask.Kind == Highpass || k.mask.Kind == Bandstop {
		taps[0]++
		total++
	}
	taps[0] += total - evenSum(taps)
	return taps
}

// evenSum is compensatedSum of an even sequence of which half is given, from its middle.
func evenSum(half []float64) float64 {
	var sum compensated
	for j := len(half) - 1; j > 0; j-- {
		sum.add(half[j])
	}
	for _, v := range half {
		sum.add(v)
	}
	return sum.value()
}

// compensatedSum is rounded about once.
func compensatedSum(x []float64) float64 {
	var sum compensated
	for _, v := range x {
		sum.add(v)
	}
	return sum.value()
}

// compensated adds with a running correction (Neumaier 1974).
type compensated struct{ sum, correction float64 }

func (c *compensated) add(v float64) {
	next := c.sum + v
	if math.Abs(c.sum) >= math.Abs(v) {
		c.correction += (c.sum - next) + v
	} else {
		c.correction += (v - next) + c.sum
	}
	c.sum = next
}

func (c *compensated) value() float64 { return c.sum + c.correction }
