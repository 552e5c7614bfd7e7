package design

import (
	"fmt"
	"math"
	"math/cmplx"
	"testing"

	"fettle/filter/response"
)

// chebyshevT is the Chebyshev polynomial of the first kind at x >= 0.
func chebyshevT(order int, x float64) float64 {
	if x <= 1 {
		return math.Cos(float64(order) * math.Acos(x))
	}
	return math.Cosh(float64(order) * math.Acosh(x))
}

// normalisedAt is the frequency of the low-pass prototype that a transform
// puts at omega, 0..Inf.
func normalisedAt(kind Kind, omega float64, edges []float64) float64 {
	w := math.Tan(omega / 2)
	x := w / edges[0]
	if kind.Edges() == 2 {
		x = math.Abs(w-edges[0]*(edges[1]/w)) / (edges[1] - edges[0])
	}
	if kind == Highpass || kind == Bandstop {
		x = 1 / x
	}
	return x
}

// TestChebyshevDefinition compares with the closed forms at all places and
// orders to 16: 1e-9, or what the sections' coefficients cost.
func TestChebyshevDefinition(t *testing.T) {
	const ripple, reject = 0.5, 70.0
	epsilon, delta := deviation(ripple), deviation(reject)
	for kind := Lowpass; kind <= Bandstop; kind++ {
		for _, p := range placesOf(kind) {
			for _, order := range []int{1, 2, 3, 6, 11, 16} {
				first, err := Chebyshev1(kind, order, p.rate, ripple, p.edges...)
				noError(t, err)
				second, err := Chebyshev2(kind, order, p.rate, reject, p.edges...)
				noError(t, err)
				warped := prewarpAll(p.edges, p.rate)
				name := fmt.Sprintf("%v order %d, %v", kind, order, p)
				checkMagnitude(t, "chebyshev1 "+name, first, p, func(omega float64) float64 {
					return 1 / math.Hypot(1, epsilon*chebyshevT(order, normalisedAt(kind, omega, warped)))
				})
				checkMagnitude(t, "chebyshev2 "+name, second, p, func(omega float64) float64 {
					return 1 / math.Hypot(1, delta/chebyshevT(order, 1/normalisedAt(kind, omega, warped)))
				})
			}
		}
	}
}

func checkMagnitude(t *testing.T, name string, f ZPK, p place, want func(omega float64) float64) {
	t.Helper()
	s := f.Sections()
	allowed := 1e-9 + float64(len(s))*roundingOf(f)
	for _, omega := range probeOmegas(p) {
		near(t, name, cmplx.Abs(f.At(omega)), want(omega), 1e-9)
		near(t, name+" sections", cmplx.Abs(response.SectionsAt(s, omega)), want(omega), allowed)
	}
}

// TestCorners: what each family has at its edges.
func TestCorners(t *testing.T) {
	const ripple, reject = 0.5, 70.0
	half := 10 * math.Log10(2)
	for _, c := range []struct {
		family string
		lossDB float64
	}{
		{"butterworth", half}, {"bessel", half}, {"linkwitz-riley", 2 * half},
		{"chebyshev1", ripple}, {"elliptic", ripple}, {"chebyshev2", reject},
	} {
		for kind := Lowpass; kind <= Bandstop; kind++ {
			for _, p := range placesOf(kind) {
				for _, order := range []int{2, 4, 6} {
					f, err := byOrder(c.family, kind, order, p.rate, ripple, reject, p.edges...)
					noError(t, err)
					for _, hz := range p.edges {
						got := toDB(cmplx.Abs(f.At(radians(hz, p.rate))))
						near(t, fmt.Sprintf("%s %v order %d at %g Hz", c.family, kind, order, hz), got, -c.lossDB, 1e-8)
					}
				}
			}
		}
	}
}

// TestLastAndFirst: the edge is the last point at -ripple of Chebyshev1, the
// first at -reject of Chebyshev2; beyond it the one falls, and stays under the
// ripple's level, and the other stays under -reject.
func TestLastAndFirst(t *testing.T) {
	const ripple, reject, edge, rate = 1.0, 60.0, 5000.0, 48000.0
	for order := 1; order <= 9; order++ {
		first, err := Chebyshev1(Lowpass, order, rate, ripple, edge)
		noError(t, err)
		second, err := Chebyshev2(Lowpass, order, rate, reject, edge)
		noError(t, err)
		one, two := first.Sections(), second.Sections()
		for hz := 50.0; hz < rate/2; hz += 50 {
			a, b := decibelsAt(one, hz, rate), decibelsAt(two, hz, rate)
			if beyond := hz > edge; !((a < -ripple-1e-9) == beyond) || !((b > -reject+1e-9) == (hz < edge)) {
				t.Errorf("order %d at %g Hz: %g dB and %g dB", order, hz, a, b)
			}
		}
	}
}

// TestLowCornerEveryFamily separates the two errors of a 10 Hz, order 8
// high-pass at 192 kHz: what float64 coefficients cost, against the prototype
// evaluated in 200 bits at the warped frequency, and what evaluation in float64
// adds to a 200-bit evaluation of the same sections. 1 + A1 + A2 is near the
// square of the corner, 1.1e-7, and off by up to 2^-54: half a 1e-9 of it, which
// the Q of a section multiplies, up to 20 in the elliptic filter; 5e-9 is half of
// that. A root in the z plane is off by 2^-54 in a distance of down to 1e-6 from the
// circle.
func TestLowCornerEveryFamily(t *testing.T) {
	const order, rate, ripple, reject, edge = 8, 192000.0, 0.1, 60.0, 10.0
	prototypes := map[string]analogue{
		"butterworth": butterworthPrototype(order), "chebyshev1": chebyshev1Prototype(order, ripple),
		"chebyshev2": chebyshev2Prototype(order, reject), "elliptic": ellipticPrototype(order, ripple, reject),
		"bessel": halfPowerBessel(order), "bessel by delay": unitDelayBessel(order), "linkwitz-riley": linkwitzRileyPrototype(order),
	}
	for _, family := range familyNamesInTests {
		f, err := byOrder(family, Highpass, order, rate, ripple, reject, edge)
		noError(t, err)
		s := f.Sections()
		if !response.Stable(s) {
			t.Errorf("%s: not stable", family)
		}
		zpk, coefficients, evaluation := 0.0, 0.0, 0.0
		for _, omega := range probeOmegas(place{rate, []float64{edge}}) {
			want := precisePrototype(prototypes[family], prewarp(edge, rate)/math.Tan(omega/2))
			precise := preciseMagnitude(s, omega)
			zpk = math.Max(zpk, math.Abs(cmplx.Abs(f.At(omega))-want))
			coefficients = math.Max(coefficients, math.Abs(precise-want))
			evaluation = math.Max(evaluation, math.Abs(cmplx.Abs(response.SectionsAt(s, omega))-precise))
		}
		t.Logf("%s: roots and gain %.2g, coefficients of the sections %.2g, their evaluation %.2g", family, zpk, coefficients, evaluation)
		near(t, family+" roots and gain", zpk, 0, 5e-11)
		near(t, family+" coefficients", coefficients, 0, 5e-9)
		near(t, family+" evaluation", evaluation, 0, 1e-13)
	}
}

// precisePrototype is |H| at x rad/s: gain times the product of |jx - zero|
// over that of |jx - pole|, in 200 bits.
func precisePrototype(a analogue, x float64) float64 {
	square := product(precise(a.gain), precise(a.gain))
	for _, z := range a.zeros {
		square.Mul(square, squaredDistance(z, x))
	}
	for _, p := range a.poles {
		square.Quo(square, squaredDistance(p, x))
	}
	magnitude, _ := square.Sqrt(square).Float64()
	return magnitude
}

// TestLinkwitzRileySum: low-pass and high-pass of an order divisible by 4 add
// up to an all-pass, as their difference does for the other orders (Linkwitz
// 1976).
func TestLinkwitzRileySum(t *testing.T) {
	for order := 2; order <= 16; order += 2 {
		low, err := LinkwitzRiley(Lowpass, order, 48000, 2500)
		noError(t, err)
		high, err := LinkwitzRiley(Highpass, order, 48000, 2500)
		noError(t, err)
		sign := complex(1, 0)
		if order%4 == 2 {
			sign = -1
		}
		for i := range 51 {
			omega := math.Pi * float64(i) / 50
			near(t, fmt.Sprintf("order %d", order), cmplx.Abs(low.At(omega)+sign*high.At(omega)), 1, 1e-12)
		}
	}
}

// TestBesselDelayAtDC: 1/(2 pi at) seconds for low corners, by the formula of
// BesselDelay for all; and the bilinear transform spoils the flatness: at its
// edge, rate/8, an analogue prototype of order 8 has kept the delay to 1e-12, the
// digital filter has 1/cos^2(pi/8) = 1.17 times that at 0 Hz.
func TestBesselDelayAtDC(t *testing.T) {
	const rate = 48000.0
	for _, at := range []float64{20, 1000, rate / 8, rate / 3} {
		for _, order := range []int{1, 4, 8} {
			f, err := BesselDelay(Lowpass, order, rate, at)
			noError(t, err)
			seconds := response.SectionsGroupDelay(f.Sections(), 0) / rate
			near(t, "formula", seconds*2*rate*math.Tan(math.Pi*at/rate), 1, 1e-6)
			if at == 20 {
				near(t, "low corner", seconds*2*math.Pi*at, 1, 1e-5)
			}
		}
	}
	f, err := BesselDelay(Lowpass, 8, rate, rate/8)
	noError(t, err)
	s := f.Sections()
	kept := response.SectionsGroupDelay(s, radians(rate/8, rate)) / response.SectionsGroupDelay(s, 0)
	near(t, "loss at the edge, as documented", unitDelayBessel(8).loss(1), 0.29, 0.005)
	near(t, "analogue delay at the edge", unitDelayBessel(8).delay(1), 1, 1e-12)
	near(t, "digital delay at the edge", kept, math.Pow(math.Cos(math.Pi/8), -2), 1e-10)
}

func TestFamilyErrors(t *testing.T) {
	check := func(says ...string) func(ZPK, error) {
		return func(_ ZPK, err error) { t.Helper(); wantError(t, err, says...) }
	}
	check("chebyshev1 lowpass: a ripple in dB of 0 is not above 0")(Chebyshev1(Lowpass, 4, 48000, 0, 1000))
	check("chebyshev1 highpass: 24000 Hz is not below half")(Chebyshev1(Highpass, 4, 48000, 1, 24000))
	check("chebyshev2 lowpass: a rejection in dB of NaN is not above 0")(Chebyshev2(Lowpass, 4, 48000, math.NaN(), 1000))
	check("chebyshev2 bandpass: a bandpass has 2 edge frequencies, not 1")(Chebyshev2(Bandpass, 4, 48000, 50, 1000))
	check("bessel lowpass: order 33 is not between")(Bessel(Lowpass, 33, 48000, 1000))
	check("bessel by delay bandstop: the lower edge 200 Hz is not below")(BesselDelay(Bandstop, 3, 48000, 200, 100))
	check("linkwitz-riley lowpass: order 3 is odd", "choose 4")(LinkwitzRiley(Lowpass, 3, 48000, 1000))
	check("linkwitz-riley lowpass: order 0 is not between")(LinkwitzRiley(Lowpass, 0, 48000, 1000))
}
