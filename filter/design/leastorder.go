package design

import (
	"fmt"
	"math"
	"strings"

	"fettle/filter/response"
)

// butterworthEdge returns the corner (half power) of the Butterworth low-pass
// whose loss is rippleDB at 1 rad/s.
func butterworthEdge(order int, rippleDB float64) float64 {
	return math.Pow(deviation(rippleDB), -1/float64(order))
}

// chebyshevEdge returns the first frequency at -rejectDB of the filter of the
// second kind whose loss is rippleDB at 1 rad/s.
func chebyshevEdge(order int, rippleDB, rejectDB float64) float64 {
	_, k1 := discrimination(rippleDB, rejectDB)
	return math.Cosh(math.Acosh(1/k1) / float64(order))
}

// leastOrder returns the least order, not rounded up, by the classical
// formulas (Parks & Burrus 1987, chapter 7), for a loss of rippleDB at a
// prototype's passband edge and of rejectDB at selectivity > 1 times it. There
// is no formula for Bessel: the orders are tried, and the result is MaxOrder+1
// if none will do. For Linkwitz-Riley it is twice that of each half.
func (f Family) leastOrder(rippleDB, rejectDB, selectivity float64) float64 {
	_, k1 := discrimination(rippleDB, rejectDB)
	switch f {
	case FamilyButterworth:
		return math.Log(1/k1) / math.Log(selectivity)
	case FamilyElliptic:
		return ellipticOrder(rippleDB, rejectDB, selectivity)
	case FamilyBessel:
		return besselOrder(rippleDB, rejectDB, selectivity)
	case FamilyLinkwitzRiley:
		return 2 * FamilyButterworth.leastOrder(rippleDB/2, rejectDB/2, selectivity)
	}
	return math.Acosh(1/k1) / math.Acosh(selectivity)
}

// besselGrowth bounds, for orders up to MaxOrder, how much faster than the
// square of the frequency the loss of a Bessel filter can grow: from any w to
// x w at most by besselGrowth x^2. It was found by evaluation, and a test holds
// it. (The loss of high orders follows a Gaussian, for which it would be 1.)
const besselGrowth = 1.34

// besselOrder tries the orders, if there is hope.
func besselOrder(rippleDB, rejectDB, selectivity float64) float64 {
	if rejectDB > besselGrowth*selectivity*selectivity*rippleDB {
		return MaxOrder + 1
	}
	for order := 1; order <= MaxOrder; order++ {
		if FamilyBessel.prototype(order, rippleDB, rejectDB).loss(selectivity) >= rejectDB {
			return float64(order)
		}
	}
	return MaxOrder + 1
}

// Loss is what a filter reaches against a mask in the classical sense, in
// which nothing is amplified and ripple is the whole drop.
type Loss struct {
	PassDB   float64 // largest attenuation in the passband
	GainDB   float64 // largest gain above 0 dB in passband and transitions
	RejectDB float64 // least attenuation in the stopband
}

// Meets reports whether the figures satisfy the mask, its ripple being the
// whole drop. Rounding may lift the passband above 0 dB by 1e-4 of the ripple.
func (got Loss) Meets(m Mask) bool {
	return got.PassDB <= m.RippleDB && got.GainDB <= tighter*m.RippleDB && got.RejectDB >= m.RejectDB
}

// MeasureLoss measures a cascade against a valid mask, at the frequencies of
// MeasureSections.
func MeasureLoss(s []response.Section, m Mask) Loss {
	t := tallySections(s, m)
	return Loss{
		PassDB:   -toDB(t.passMin),
		GainDB:   toDB(math.Max(t.passMax, t.overMax)),
		RejectDB: -toDB(t.stopMax),
	}
}

// tighter is how much of the ripple, and how many dB of the rejection, a
// design keeps in hand, so that rounding cannot spoil the measured result.
const tighter = 1e-4

// LeastOrder returns the filter of a family with the least prototype order
// that meets the mask, and that order. Ripple has its classical sense here: the
// passband lies between 0 dB and -RippleDB, whereas the kernels designed from a
// mask, and EllipticFor, have plus and minus RippleDB.
//
// The start is the classical formula for the order; the sections are measured,
// and the order is raised until they meet the mask. The passband edges are met
// exactly: the loss there is RippleDB (less 1e-4 of it); what the rounded-up
// order has left over goes to the stopband, which is deeper (Butterworth,
// Chebyshev1, Bessel, Linkwitz-Riley) or begins sooner (Chebyshev2, elliptic;
// with a level of RejectDB). In a band-pass that holds for the pass edges, and
// the tighter transition sets the order. In a band-stop with unequal
// transitions the pass edge of the looser one is moved towards the stopband,
// which makes the order least, and the other is met exactly.
//
// All families can be asked. A Bessel filter rejects at most 1.34 RippleDB
// (stop/pass)^2, so that few specifications suit it; a Linkwitz-Riley order is
// even.
//
// Errors: an unknown family; what Validate reports; an order above 32, with the
// families that can do it.
func LeastOrder(family Family, m Mask) (f ZPK, order int, err error) {
	if err := family.check(); err != nil {
		return ZPK{}, 0, err
	}
	if err := m.Validate(); err != nil {
		return ZPK{}, 0, fmt.Errorf("%v %v: %w", family, m.Kind, err)
	}
	ripple, reject := m.RippleDB*(1-tighter), m.RejectDB+tighter
	warped, selectivity := m.selectivity()
	for order := family.roundedUp(family.leastOrder(ripple, reject, selectivity)); order <= MaxOrder; order += family.step() {
		f := family.prototype(order, ripple, reject).transformed(m.Kind, warped).digital()
		if MeasureLoss(f.Sections(), m).Meets(m) {
			return f, order, nil
		}
	}
	return ZPK{}, 0, fmt.Errorf("%v %v: a transition of %g Hz with %g dB of ripple and %g dB of rejection needs an order above %d; %s",
		family, m.Kind, m.Narrowest(), m.RippleDB, m.RejectDB, MaxOrder, advice(ripple, reject, selectivity))
}

// step is the difference between successive orders.
func (f Family) step() int {
	if f == FamilyLinkwitzRiley {
		return 2
	}
	return 1
}

// roundedUp returns the next order the family has, forgiving rounding in the
// formula.
func (f Family) roundedUp(order float64) int {
	step := f.step()
	steps := math.Ceil(math.Min(order, MaxOrder+1)/float64(step) - 1e-9)
	return step * int(math.Max(1, steps))
}

// advice names the families that meet a specification, with their orders.
func advice(rippleDB, rejectDB, selectivity float64) string {
	var able []string
	for f := FamilyButterworth; f <= FamilyLinkwitzRiley; f++ {
		if order := f.roundedUp(f.leastOrder(rippleDB, rejectDB, selectivity)); order <= MaxOrder {
			able = append(able, fmt.Sprintf("%v (order %d)", f, order))
		}
	}
	if len(able) == 0 {
		return "widen the transition or lower the rejection"
	}
	return "choose " + strings.Join(able, ", ") + ", or widen the transition"
}
