package design

import (
	"fmt"
	"math"
	"math/cmplx"
	"testing"

	"fettle/filter/response"
)

// recursiveFixture is testdata/recursive.json; see recursive.py for what made it.
type recursiveFixture struct {
	MadeWith string `json:"made_with"`
	Designs  []struct {
		Family string
		recursiveCase
	}
	Orders []struct {
		orderCase
		Least map[string]int
	}
}

var loadRecursive = fixtureFile[recursiveFixture]("recursive.json")

// familyNamesInTests are those byOrder knows.
var familyNamesInTests = []string{"butterworth", "chebyshev1", "chebyshev2", "elliptic", "bessel", "bessel by delay", "linkwitz-riley"}

// byOrder designs by the family's name.
func byOrder(family string, kind Kind, order int, rate, ripple, reject float64, edges ...float64) (ZPK, error) {
	switch family {
	case "butterworth":
		return Butterworth(kind, order, rate, edges...)
	case "chebyshev1":
		return Chebyshev1(kind, order, rate, ripple, edges...)
	case "chebyshev2":
		return Chebyshev2(kind, order, rate, reject, edges...)
	case "elliptic":
		return Elliptic(kind, order, rate, ripple, reject, edges...)
	case "bessel":
		return Bessel(kind, order, rate, edges...)
	case "bessel by delay":
		return BesselDelay(kind, order, rate, edges...)
	case "linkwitz-riley":
		return LinkwitzRiley(kind, order, rate, edges...)
	}
	return ZPK{}, fmt.Errorf("no family %q", family)
}

// TestRecursiveAgainstSciPy compares 600 designs with SciPy's: zeros and poles
// of prototype orders to 5 relative to their distance from z = 1 or z = -1 (as
// compareRoots says), the response of orders to 16 in absolute terms, the
// passband being 1. The places are an ordinary one, edges beside half the rate,
// a band of nine octaves, a narrow band and a 20 Hz corner at 192 kHz. The
// sections are held to the same response, or to what the rounding of their
// coefficients costs if that is more. The worst root, 1.4e-10, is SciPy's own:
// it solves the quadratic of a wide band by the difference that cancels.
func TestRecursiveAgainstSciPy(t *testing.T) {
	worst := map[string][3]float64{}
	for _, c := range loadRecursive(t).Designs {
		name := fmt.Sprintf("%s %s order %d at %g Hz, %v", c.Family, c.Kind, c.Order, c.Rate, c.Edges)
		f, err := byOrder(c.Family, kindNamed(t, c.Kind), c.Order, c.Rate, c.Ripple, c.Reject, c.Edges...)
		noError(t, err)
		w := worst[c.Family]
		if c.Poles != nil {
			w[0] = math.Max(w[0], compareRoots(t, name+" poles", f.P, c.Poles, 1e-8))
			w[0] = math.Max(w[0], compareRoots(t, name+" zeros", f.Z, c.Zeros, 1e-8))
		}
		s := f.Sections()
		allowed := math.Max(1e-9, float64(len(s))*roundingOf(f))
		for i, hz := range c.Hz {
			omega, want := radians(hz, c.Rate), complex(c.Response[i][0], c.Response[i][1])
			off, sectionsOff := cmplx.Abs(f.At(omega)-want), cmplx.Abs(response.SectionsAt(s, omega)-want)
			near(t, fmt.Sprintf("%s response at %g Hz", name, hz), off, 0, 1e-9)
			near(t, fmt.Sprintf("%s sections at %g Hz", name, hz), sectionsOff, 0, allowed)
			w[1], w[2] = math.Max(w[1], off), math.Max(w[2], sectionsOff)
		}
		worst[c.Family] = w
	}
	for family, w := range worst {
		t.Logf("%s: worst root %.2g of its distance, response %.2g, of the sections %.2g", family, w[0], w[1], w[2])
	}
}

// TestOrdersAgainstSciPy compares the formulas with buttord, cheb1ord, cheb2ord
// and ellipord, for transitions alike and unlike.
func TestOrdersAgainstSciPy(t *testing.T) {
	for _, c := range loadRecursive(t).Orders {
		m := c.mask(t)
		_, selectivity := m.selectivity()
		for family := FamilyButterworth; family <= FamilyElliptic; family++ {
			got := family.roundedUp(family.leastOrder(c.Ripple, c.Reject, selectivity))
			if want := min(c.Least[family.String()], MaxOrder+1); got != want {
				t.Errorf("%v %+v: order %d, want %d", family, m, got, want)
			}
		}
	}
}

func (c orderCase) mask(t *testing.T) Mask {
	t.Helper()
	m := Mask{Kind: kindNamed(t, c.Kind), RippleDB: c.Ripple, RejectDB: c.Reject, Rate: c.Rate}
	copy(m.Pass[:], c.Passes)
	copy(m.Stop[:], c.Stops)
	return m
}
