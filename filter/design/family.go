package design

import "fmt"

// Family is a classical recursive approximation.
type Family int

const (
	FamilyButterworth   Family = iota // flat passband, falling without end
	FamilyChebyshev1                  // rippled passband
	FamilyChebyshev2                  // rippled stopband
	FamilyElliptic                    // both: the least order of all
	FamilyBessel                      // flat group delay of the analogue low-pass
	FamilyLinkwitzRiley               // two equal Butterworths, for crossovers
)

var familyNames = [...]string{"butterworth", "chebyshev1", "chebyshev2", "elliptic", "bessel", "linkwitz-riley"}

// String names the family as a chain file does.
func (f Family) String() string {
	if f.check() != nil {
		return fmt.Sprintf("Family(%d)", int(f))
	}
	return familyNames[f]
}

func (f Family) check() error {
	if f < 0 || int(f) >= len(familyNames) {
		return fmt.Errorf("family %d is none of %v", int(f), familyNames)
	}
	return nil
}

// prototype returns the low-pass whose loss at 1 rad/s, its passband edge, is
// rippleDB. Where the family has a stopband level it is rejectDB. The order of
// a Linkwitz-Riley filter is even.
func (f Family) prototype(order int, rippleDB, rejectDB float64) analogue {
	switch f {
	case FamilyChebyshev1:
		return chebyshev1Prototype(order, rippleDB)
	case FamilyChebyshev2:
		return chebyshev2Prototype(order, rejectDB).scaled(chebyshevEdge(order, rippleDB, rejectDB))
	case FamilyElliptic:
		return ellipticPrototype(order, rippleDB, rejectDB)
	case FamilyBessel:
		return unitDelayBessel(order).lossAtOne(rippleDB)
	case FamilyLinkwitzRiley:
		return linkwitzRileyPrototype(order).scaled(butterworthEdge(order/2, rippleDB/2))
	}
	return butterworthPrototype(order).scaled(butterworthEdge(order, rippleDB))
}
