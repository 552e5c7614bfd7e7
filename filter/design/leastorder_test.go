package design

import (
	"fmt"
	"math"
	"math/cmplx"
	"math/rand/v2"
	"testing"

	"fettle/filter/response"
)

// TestLeastOrder: for a mask of each kind, two of them with transitions unlike,
// every family with an order formula meets it, exactly at a pass edge, and not
// with the next lower order.
func TestLeastOrder(t *testing.T) {
	all := masks()
	for _, m := range []Mask{all[1], all[4], all[6], all[7]} {
		for _, family := range []Family{FamilyButterworth, FamilyChebyshev1, FamilyChebyshev2, FamilyElliptic, FamilyLinkwitzRiley} {
			f, order, err := LeastOrder(family, m)
			noError(t, err)
			s := f.Sections()
			got := MeasureLoss(s, m)
			name := fmt.Sprintf("%v %v", family, m.Kind)
			t.Logf("%s: order %d, loss %.5f dB of %g, gain %.2g dB, rejection %.3f dB of %g",
				name, order, got.PassDB, m.RippleDB, got.GainDB, got.RejectDB, m.RejectDB)
			if !got.Meets(m) || !response.Stable(s) {
				t.Errorf("%s: %+v does not meet %+v, or is unstable", name, got, m)
			}
			withinLoss(t, name, m, s)
			checkExactEdge(t, name, m, s)
			warped, _ := m.selectivity()
			lower := family.prototype(order-family.step(), m.RippleDB, m.RejectDB).transformed(m.Kind, warped).digital()
			if MeasureLoss(lower.Sections(), m).Meets(m) {
				t.Errorf("%s: order %d meets the mask as well", name, order-family.step())
			}
		}
	}
}

// withinLoss checks passband and stopband on an independent grid.
func withinLoss(t *testing.T, name string, m Mask, s []response.Section) {
	t.Helper()
	const points = 5003
	for i := range points + 1 {
		hz := m.Rate / 2 * float64(i) / points
		db := toDB(cmplx.Abs(response.SectionsAt(s, radians(hz, m.Rate))))
		lo, hi := m.Bounds(hz)
		stops := lo == 0 && hi == fromDB(-m.RejectDB)
		if lo > 0 && !(db >= -m.RippleDB) || stops && !(db <= -m.RejectDB) || !(db <= 1e-4*m.RippleDB) {
			t.Errorf("%s: %.4f dB at %.2f Hz", name, db, hz)
			return
		}
	}
}

// checkExactEdge: the loss at one pass edge is the ripple less 1e-4 of it.
func checkExactEdge(t *testing.T, name string, m Mask, s []response.Section) {
	t.Helper()
	nearest := math.Inf(1)
	for _, hz := range m.Pass[:m.edges()] {
		nearest = math.Min(nearest, math.Abs(decibelsAt(s, hz, m.Rate)+m.RippleDB*(1-1e-4)))
	}
	near(t, name+" loss at the pass edge less the ripple", nearest, 0, 1e-7)
}

// TestLeastOrderRandom: what is returned meets the mask as measured; what is
// refused is told with the families that can.
func TestLeastOrderRandom(t *testing.T) {
	rng := rand.New(rand.NewPCG(3, 4))
	for drawn := 0; drawn < 15; {
		m, ok := randomMask(rng)
		if !ok {
			continue
		}
		family := Family(rng.IntN(6))
		drawn++
		f, order, err := LeastOrder(family, m)
		if err != nil {
			wantError(t, err, family.String()+" "+m.Kind.String(), "needs an order above 32; ", "widen the transition")
			continue
		}
		if got := MeasureLoss(f.Sections(), m); !got.Meets(m) || len(f.P) != order*m.Kind.Edges() {
			t.Errorf("%v %+v: order %d, %+v", family, m, order, got)
		}
	}
}

// TestLeastOrderBessel: a slow transition suits it; the order is the least
// whose prototype reaches the rejection.
func TestLeastOrderBessel(t *testing.T) {
	m := Mask{Kind: Lowpass, Pass: [2]float64{1000}, Stop: [2]float64{4000}, RippleDB: 3, RejectDB: 40, Rate: 48000}
	f, order, err := LeastOrder(FamilyBessel, m)
	noError(t, err)
	got := MeasureLoss(f.Sections(), m)
	t.Logf("order %d, %+v", order, got)
	if !got.Meets(m) {
		t.Errorf("order %d: %+v", order, got)
	}
	lower := FamilyBessel.prototype(order-1, m.RippleDB, 0).scaled(prewarp(1000, m.Rate)).digital()
	if MeasureLoss(lower.Sections(), m).Meets(m) {
		t.Errorf("order %d meets the mask as well", order-1)
	}
}

func TestLeastOrderErrors(t *testing.T) {
	m := Mask{Kind: Lowpass, Pass: [2]float64{1000}, Stop: [2]float64{1200}, RippleDB: 0.1, RejectDB: 60, Rate: 48000}
	_, _, err := LeastOrder(FamilyBessel, m)
	wantError(t, err, "bessel lowpass: a transition of 200 Hz", "an order above 32; choose chebyshev1 (order", "elliptic (order")
	_, _, err = LeastOrder(Family(9), m)
	wantError(t, err, "family 9 is none of")
	m.Stop[0] = 1000.001
	_, _, err = LeastOrder(FamilyElliptic, m)
	wantError(t, err, "elliptic lowpass", "above 32; widen the transition or lower the rejection")
	m.Stop[0] = 900
	_, _, err = LeastOrder(FamilyChebyshev2, m)
	wantError(t, err, "chebyshev2 lowpass: the pass edge 1000 Hz must lie below")
	if got := Family(9).String(); got != "Family(9)" {
		t.Errorf("Family(9) is named %q", got)
	}
}
