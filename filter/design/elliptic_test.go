package design

import (
	"fmt"
	"math"
	"math/cmplx"
	"testing"

	"fettle/filter/response"
)

// TestEllipticAgainstSciPy compares the response with scipy.signal.ellip,
// orders 1 to 8; the passband is 1. SciPy's own roots and 15 printed digits
// leave about 1e-12.
func TestEllipticAgainstSciPy(t *testing.T) {
	worst := 0.0
	for _, c := range loadFixtures(t).Elliptic {
		name := fmt.Sprintf("%s order %d at %g Hz", c.Kind, c.Order, c.Rate)
		f, err := Elliptic(kindNamed(t, c.Kind), c.Order, c.Rate, c.Ripple, c.Reject, c.Edges...)
		noError(t, err)
		for i, hz := range c.Hz {
			want := complex(c.Response[i][0], c.Response[i][1])
			off := cmplx.Abs(f.At(radians(hz, c.Rate)) - want)
			near(t, fmt.Sprintf("%s at %g Hz", name, hz), off, 0, 1e-10)
			worst = math.Max(worst, off)
		}
	}
	t.Logf("worst difference %.2g", worst)
}

// TestEllipticOrders compares the order formula with scipy.signal.ellipord.
func TestEllipticOrders(t *testing.T) {
	for _, c := range loadFixtures(t).EllipticOrders {
		m := Mask{Kind: kindNamed(t, c.Kind), RippleDB: c.Ripple, RejectDB: c.Reject, Rate: c.Rate}
		copy(m.Pass[:], c.Passes)
		copy(m.Stop[:], c.Stops)
		_, selectivity := m.selectivity()
		if got := int(math.Ceil(ellipticOrder(c.Ripple, c.Reject, selectivity))); got != c.Order {
			t.Errorf("%s pass %v stop %v, %g and %g dB: order %d, want %d", c.Kind, c.Passes, c.Stops, c.Ripple, c.Reject, got, c.Order)
		}
	}
}

// TestEllipticShape reads the definition off the response: the edge is at
// -ripple, the passband's extremes are 0 dB and -ripple, the stopband's
// maximum is -reject.
func TestEllipticShape(t *testing.T) {
	const ripple, reject, edge, rate = 0.5, 70.0, 5000.0, 48000.0
	for order := 2; order <= 12; order++ {
		f, err := Elliptic(Lowpass, order, rate, ripple, reject, edge)
		noError(t, err)
		s := f.Sections()
		near(t, "edge", decibelsAt(s, edge, rate), -ripple, 1e-9)
		least, most, leak := 0.0, math.Inf(-1), math.Inf(-1)
		rising := false
		for hz := 0.0; hz < rate/2; hz++ {
			db := decibelsAt(s, hz, rate)
			if hz <= edge {
				least, most = math.Min(least, db), math.Max(most, db)
				continue
			}
			rising = rising || db > decibelsAt(s, hz-1, rate)
			if rising {
				leak = math.Max(leak, db)
			}
		}
		near(t, fmt.Sprintf("order %d least", order), least, -ripple, 1e-4)
		near(t, fmt.Sprintf("order %d most", order), most, 0, 1e-4)
		near(t, fmt.Sprintf("order %d leak", order), leak, -reject, 1e-3)
	}
}

func masks() []Mask {
	return []Mask{
		{Kind: Lowpass, Pass: [2]float64{12000}, Stop: [2]float64{14000}, RippleDB: 0.1, RejectDB: 80, Rate: 48000},
		{Kind: Lowpass, Pass: [2]float64{3000}, Stop: [2]float64{4000}, RippleDB: 1, RejectDB: 40, Rate: 192000},
		{Kind: Lowpass, Pass: [2]float64{3400}, Stop: [2]float64{3900}, RippleDB: 0.05, RejectDB: 100, Rate: 8000},
		{Kind: Highpass, Pass: [2]float64{120}, Stop: [2]float64{60}, RippleDB: 0.1, RejectDB: 60, Rate: 16000},
		{Kind: Highpass, Pass: [2]float64{3000}, Stop: [2]float64{2600}, RippleDB: 0.02, RejectDB: 50, Rate: 8000},
		{Kind: Bandpass, Pass: [2]float64{300, 3400}, Stop: [2]float64{150, 3900}, RippleDB: 0.1, RejectDB: 60, Rate: 16000},
		{Kind: Bandpass, Pass: [2]float64{900, 1100}, Stop: [2]float64{700, 1500}, RippleDB: 0.5, RejectDB: 70, Rate: 44100},
		{Kind: Bandstop, Pass: [2]float64{900, 1500}, Stop: [2]float64{1000, 1200}, RippleDB: 0.1, RejectDB: 50, Rate: 44100},
		{Kind: Bandstop, Pass: [2]float64{1000, 9000}, Stop: [2]float64{2000, 8500}, RippleDB: 0.2, RejectDB: 80, Rate: 48000},
	}
}

// withinBounds checks a magnitude against the mask's own Bounds on an
// independent even grid, allowing rounding at the edges.
func withinBounds(t *testing.T, name string, m Mask, magnitude func(omega float64) float64) {
	t.Helper()
	const points = 20011
	for i := range points + 1 {
		hz := m.Rate / 2 * float64(i) / points
		lo, hi := m.Bounds(hz)
		got := magnitude(radians(hz, m.Rate))
		if !(got >= lo*(1-1e-12) && got <= hi*(1+1e-12)) {
			t.Errorf("%s: %.3f dB at %.2f Hz, allowed %.3f to %.3f dB", name, toDB(got), hz, toDB(lo), toDB(hi))
			return
		}
	}
}

// TestEllipticFor: the mask is met, and with one order less it cannot be, even
// with its edges and gain where they are best.
func TestEllipticFor(t *testing.T) {
	for _, m := range masks() {
		f, order, err := EllipticFor(m)
		noError(t, err)
		s := f.Sections()
		got := MeasureSections(s, m)
		t.Logf("%v order %d: ripple %.5f dB of %g, rejection %.2f dB of %g", m.Kind, order, got.RippleDB, m.RippleDB, got.RejectDB, m.RejectDB)
		if !got.Meets(m) || !response.Stable(s) {
			t.Errorf("%v: %+v does not meet %+v, or is unstable", m.Kind, got, m)
		}
		withinBounds(t, m.Kind.String(), m, func(omega float64) float64 { return cmplx.Abs(response.SectionsAt(s, omega)) })
		warped, selectivity := m.selectivity()
		lower := ellipticPrototype(order-1, 2*m.RippleDB, m.RejectDB+m.RippleDB).transformed(m.Kind, warped).digital()
		lower.K *= fromDB(m.RippleDB)
		if MeasureSections(lower.Sections(), m).Meets(m) {
			t.Errorf("%v: order %d meets the mask as well (selectivity %.4f)", m.Kind, order-1, selectivity)
		}
	}
}

func TestEllipticErrors(t *testing.T) {
	_, err := Elliptic(Lowpass, 4, 48000, 0, 60, 1000)
	wantError(t, err, "ripple of 0 dB")
	_, err = Elliptic(Lowpass, 4, 48000, 3, 2, 1000)
	wantError(t, err, "rejection of 2 dB is not above the ripple of 3 dB")
	_, _, err = EllipticFor(Mask{Kind: Lowpass, Pass: [2]float64{1000}, Stop: [2]float64{900}, RippleDB: 1, RejectDB: 60, Rate: 48000})
	wantError(t, err, "pass edge 1000 Hz must lie below the stop edge 900 Hz")
	_, _, err = EllipticFor(Mask{Kind: Lowpass, Pass: [2]float64{1000}, Stop: [2]float64{1000.000001}, RippleDB: 0.001, RejectDB: 150, Rate: 48000})
	wantError(t, err, "more than 32", "widen the transition")
}

// TestJacobi checks identities and values of Abramowitz & Stegun: table 17.1,
// K at m = 0.5; 16.9, sn^2 + cn^2 = 1 and dn^2 + m sn^2 = 1; sn(K) = 1; and
// sn(F(t)) for the incomplete integral.
func TestJacobi(t *testing.T) {
	near(t, "K(m=0.5)", completeK(math.Sqrt(0.5)), 1.854074677301372, 1e-15)
	for _, k := range []float64{1e-6, 0.1, 0.5, 0.9, 0.999999} {
		complement := complementOf(k)
		quarter := completeK(complement)
		sn, _, dn := jacobi(quarter, k, complement)
		near(t, "sn(K)", sn, 1, 1e-14)
		near(t, "dn(K)", dn, complement, 1e-12)
		for _, u := range []float64{0.1, 0.5, 0.9} {
			sn, cn, dn := jacobi(u*quarter, k, complement)
			near(t, "sn^2 + cn^2", sn*sn+cn*cn, 1, 1e-15)
			near(t, "dn^2 + m sn^2", dn*dn+k*k*sn*sn, 1, 1e-14)
			near(t, "F of sn/cn", incompleteF(sn/cn, complement), u*quarter, 1e-13*quarter)
		}
	}
}
