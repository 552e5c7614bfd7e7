package design

import (
	"fmt"
	"math"
	"math/cmplx"
	"slices"

	"fettle/filter/response"
)

// How a replay curve becomes digital. Of a corner, 1 + (wT)^2 is a function of
// phi = sin^2(omega/2) by w = 2 rate asin(sqrt phi). It is analytic but for a
// cut from phi = 1 to infinity, and its one zero, where w^2 = -1/T^2, is that
// of z = exp(-1/(T rate)): the matched z transform is exact, and what it leaves
// is a smooth function that only the cut bends. A rational function therefore
// comes near to it fast, with poles and zeros on the cut alone, which is the
// negative real axis of z. There they can stay inside the circle by
// construction.

const (
	// leakTime stands for an infinite time constant: the root goes from 0 Hz
	// to 0.32 Hz. The cost is 0.0044 dB and 0.5 ms of group delay at 10 Hz, a
	// quarter of both at 20 Hz; the gain is a filter that is stable in both
	// directions and forgets in seconds.
	leakTime = 0.5

	lowestReplayRate = 1000.0
	lowestReplayHz   = 10.0 // measured from here
	replayReach      = 0.49 // of the rate: fitted and measured up to here
)

// Sections returns a stable cascade of minimum phase with the magnitude of the
// analogue curve, without the bilinear transform's compression, and the
// largest deviation worstDB, in dB, as measured at 2000 frequencies from 10 Hz to
// 0.49 of the rate, evenly by octaves and evenly in Hz. It is at most 0.005 dB
// for all curves of ReplayCurves at rates from 8 kHz to 192 kHz.
//
// Poles and zeros are matched (z = exp(-1/(T rate))), and the rest is made up by
// three poles and three zeros on the negative real axis, fitted by least
// squares. A root at 0 Hz is put to 0.32 Hz, so the cascade is not 0 and not
// infinite at 0 Hz, where it departs from the analogue curve: a tape amplifier
// without a bass time constant lifts an offset by 70 dB, which wants a dc stage
// before it. Such a root also has a group delay that the analogue one has not,
// 0.13 ms at 20 Hz, falling with the square of the frequency. Otherwise the group
// delay is the analogue curve's to half a sample, far below half the rate.
//
// The sections of Inverse are the reciprocal, to rounding, though the analogue
// curve may rise without bound: what lies above half the rate is left out.
//
// Errors: a rate under 1000 Hz or not finite; a curve with no time constants or
// with one that is neither infinite nor from 1 us to 1 s.
func (c ReplayCurve) Sections(rate float64) (sections []response.Section, worstDB float64, err error) {
	if err := c.check(rate); err != nil {
		return nil, 0, fmt.Errorf("replay curve %s: %w", c.Name, err)
	}
	sections = c.digital(rate).Sections()
	return sections, c.worst(sections, rate), nil
}

func (c ReplayCurve) check(rate float64) error {
	if !(rate >= lowestReplayRate) || math.IsInf(rate, 1) {
		return fmt.Errorf("a rate of %g Hz is not a finite one of at least %g Hz", rate, lowestReplayRate)
	}
	if len(c.Zeros)+len(c.Poles) == 0 {
		return fmt.Errorf("it has no time constants; name a standard curve or give its times")
	}
	for _, t := range slices.Concat(c.Zeros, c.Poles) {
		if atDC(t) {
			continue
		}
		if err := checkTime(t); err != nil {
			return err
		}
	}
	return nil
}

// matchedCorner is the root exp(-1/(T rate)) of a time constant.
type matchedCorner struct {
	turn    float64 // T rate: wT = omega turn
	root    float64
	reach   float64 // 1 - root, without cancellation
	atStart float64 // what the corner's factor is at 0 Hz: 1, or 1/T for s leaked
}

func cornerAt(time, rate float64) matchedCorner {
	m := matchedCorner{atStart: 1}
	if atDC(time) {
		time = leakTime
		m.atStart = 1 / time
	}
	m.turn = time * rate
	m.root = math.Exp(-1 / m.turn)
	m.reach = -math.Expm1(-1 / m.turn)
	return m
}

// mismatch is log|H|^2 of the analogue factor less that of its matched root.
func (m matchedCorner) mismatch(omega float64) float64 {
	analogue := omega * m.turn
	return math.Log1p(analogue*analogue) - math.Log1p(4*m.root*phiAt(omega)/(m.reach*m.reach))
}

// digital puts the matched roots and the correction together, the latter being
// 1 at 0 Hz, so that the gain there is the leaked curve's.
func (c ReplayCurve) digital(rate float64) ZPK {
	zeros, poles := cornersAt(c.Zeros, rate), cornersAt(c.Poles, rate)
	lack := fitCorrection(func(omega float64) (sum float64) {
		for _, m := range zeros {
			sum += m.mismatch(omega)
		}
		for _, m := range poles {
			sum -= m.mismatch(omega)
		}
		return sum
	})
	z, above := rootsAndGain(zeros, lack.zeros)
	p, below := rootsAndGain(poles, lack.poles)
	for len(z) < len(p) {
		z = append(z, 0)
	}
	for len(p) < len(z) {
		p = append(p, 0)
	}
	return ZPK{Z: z, P: p, K: above / below / cmplx.Abs(c.unscaled(c.ReferenceHz))}
}

func cornersAt(times []float64, rate float64) []matchedCorner {
	corners := make([]matchedCorner, len(times))
	for i, t := range times {
		corners[i] = cornerAt(t, rate)
	}
	return corners
}

// rootsAndGain lists the roots, and the gain with which the product of their
// factors (1 - root/z) has the value of the analogue factors at 0 Hz.
func rootsAndGain(corners []matchedCorner, negative []float64) (roots []complex128, gain float64) {
	gain = 1
	for _, m := range corners {
		roots = append(roots, complex(m.root, 0))
		gain *= m.atStart / m.reach
	}
	for _, r := range negative {
		roots = append(roots, complex(r, 0))
		gain /= 1 - r
	}
	return roots, gain
}

func (c ReplayCurve) worst(sections []response.Section, rate float64) (db float64) {
	const points = 1000
	top := replayReach * rate
	for i := range points {
		part := float64(i) / (points - 1)
		for _, hz := range [2]float64{lowestReplayHz * math.Pow(top/lowestReplayHz, part), lowestReplayHz + (top-lowestReplayHz)*part} {
			reached := toDB(cmplx.Abs(response.SectionsAt(sections, 2*math.Pi*hz/rate)))
			db = math.Max(db, math.Abs(reached-c.DecibelsAt(hz)))
		}
	}
	return db
}
