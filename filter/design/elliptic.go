package design

import (
	"fmt"
	"math"
)

// Elliptic returns the elliptic (Cauer) filter of a prototype order 1..32: in
// the passband the magnitude ripples between 0 dB and -rippleDB, in the
// stopband it stays at or under -rejectDB; edges are the last frequencies of
// the passband at -rippleDB, one for a low-pass or high-pass, lower and upper
// for a band. Where the stopband begins follows from the order. An even-order
// low-pass has -rippleDB at 0 Hz.
//
// Note that rippleDB here is the whole drop, as in the textbooks; a mask's
// ripple is plus and minus (see EllipticFor).
//
// Errors: as Butterworth; ripple or rejection not above 0 dB; rejection not
// above ripple. Source: Parks & Burrus (1987), chapter 7; Lutovac, Tosic &
// Evans (2001), chapter on elliptic rational functions.
func Elliptic(kind Kind, order int, rate, rippleDB, rejectDB float64, edges ...float64) (ZPK, error) {
	warped, err := prepare(kind, order, rate, edges)
	if err == nil {
		err = Mask{RippleDB: rippleDB, RejectDB: rejectDB}.checkDecibels()
	}
	if err != nil {
		return ZPK{}, fmt.Errorf("elliptic %v: %w", kind, err)
	}
	return ellipticPrototype(order, rippleDB, rejectDB).transformed(kind, warped).digital(), nil
}

// discrimination returns the modulus k1 of the ripples, the ratio of the
// passband's to the stopband's deviation, with that of the passband.
func discrimination(rippleDB, rejectDB float64) (epsilon, k1 float64) {
	epsilon = deviation(rippleDB)
	return epsilon, epsilon / deviation(rejectDB)
}

// complementOf returns sqrt(1 - k^2).
func complementOf(k float64) float64 { return math.Sqrt((1 - k) * (1 + k)) }

// ellipticPrototype is the low-pass with its passband edge at 1 rad/s. The
// zeros lie at j/(k cd(u K)), the poles at j cd((u - j v) K), u = (2i-1)/order,
// with v given by the ripple and k by the degree equation.
func ellipticPrototype(order int, rippleDB, rejectDB float64) analogue {
	epsilon, k1 := discrimination(rippleDB, rejectDB)
	complement1 := complementOf(k1)
	k, complement := degreeModulus(order, k1)
	quarter := completeK(complement)
	height := quarter * incompleteF(1/epsilon, k1) / (float64(order) * completeK(complement1))
	snv, cnv, dnv := jacobi(height, complement, k)

	a := analogue{gain: 1}
	dc := 1.0
	for i := 1; i <= order/2; i++ {
		u := float64(order-2*i+1) / float64(order) // cd(x) = sn(K - x)
		sn, cn, dn := jacobi(u*quarter, k, complement)
		denominator := cnv*cnv + k*k*sn*sn*snv*snv
		re, im := -cn*dn*snv*cnv/denominator, sn*dnv/denominator
		zero := 1 / (k * sn)
		a.zeros = append(a.zeros, complex(0, zero), complex(0, -zero))
		a.poles = append(a.poles, complex(re, im), complex(re, -im))
		dc *= zero * zero / (re*re + im*im)
	}
	if order%2 == 1 {
		real := -snv / cnv
		a.poles = append(a.poles, complex(real, 0))
		dc /= -real
		a.gain = 1 / dc
	} else {
		a.gain = fromDB(-rippleDB) / dc
	}
	return a
}

// degreeModulus solves the degree equation order K'/K = K1'/K1 for the modulus
// k and its complement: the nome of k is the order-th root of that of k1, and
// k follows from the nome by theta series (Abramowitz & Stegun, 16.27, 16.38).
func degreeModulus(order int, k1 float64) (k, complement float64) {
	q := math.Exp(-math.Pi * completeK(k1) / (completeK(complementOf(k1)) * float64(order)))
	theta2, theta3, theta4 := 1.0, 1.0, 1.0
	for m := 1.0; m < 100; m++ {
		square := math.Pow(q, m*m)
		theta2 += math.Pow(q, m*(m+1))
		theta3 += 2 * square
		theta4 += 2 * math.Copysign(square, 1-2*math.Mod(m, 2))
	}
	k = 4 * math.Sqrt(q) * theta2 * theta2 / (theta3 * theta3)
	complement = theta4 * theta4 / (theta3 * theta3)
	return math.Min(k, 1), complement
}

// ellipticOrder returns the least order, not rounded up, for a prototype
// whose stopband begins at selectivity > 1 times its passband edge.
func ellipticOrder(rippleDB, rejectDB, selectivity float64) float64 {
	_, k1 := discrimination(rippleDB, rejectDB)
	k := 1 / selectivity
	return completeK(complementOf(k)) * completeK(k1) / (completeK(k) * completeK(complementOf(k1)))
}

// EllipticFor returns the elliptic filter of least prototype order that meets
// the mask, with that order. The gain is centred, so that the passband lies
// within plus and minus the ripple. The classical order formula is the start;
// the sections are measured, and the order is raised until they meet the mask.
// The passband edges are the mask's, except that a band-stop with unequal
// transitions has its looser one moved inwards, which is what makes its order
// least. Ripple and rejection are designed tighter by 1e-4 of the ripple and
// 1e-4 dB, so that rounding cannot spoil the measured result.
//
// Errors: what Validate reports; an order above 32.
func EllipticFor(m Mask) (f ZPK, order int, err error) {
	if err := m.Validate(); err != nil {
		return ZPK{}, 0, fmt.Errorf("elliptic %v: %w", m.Kind, err)
	}
	ripple := 2 * m.RippleDB * (1 - tighter)
	reject := m.RejectDB + ripple/2 + tighter
	warped, selectivity := m.selectivity()
	start := math.Ceil(ellipticOrder(ripple, reject, selectivity) - 1e-9)
	for n := start; n <= MaxOrder; n++ {
		order := int(math.Max(1, n))
		f := ellipticPrototype(order, ripple, reject).transformed(m.Kind, warped).digital()
		f.K *= fromDB(ripple / 2)
		if MeasureSections(f.Sections(), m).Meets(m) {
			return f, order, nil
		}
	}
	return ZPK{}, 0, fmt.Errorf("elliptic %v: a transition of %g Hz with %g dB of ripple and %g dB of rejection needs an order of %.0f, more than %d; widen the transition or lower the rejection",
		m.Kind, m.Narrowest(), m.RippleDB, m.RejectDB, math.Max(start, MaxOrder+1), MaxOrder)
}

// selectivity returns the prewarped passband edges to design with and the
// ratio of stop to pass edge of the prototype they amount to.
func (m Mask) selectivity() (edges []float64, ratio float64) {
	pass, stop := prewarpAll(m.Pass[:m.edges()], m.Rate), prewarpAll(m.Stop[:m.edges()], m.Rate)
	switch m.Kind {
	case Lowpass:
		return pass, stop[0] / pass[0]
	case Highpass:
		return pass, pass[0] / stop[0]
	case Bandpass:
		ratio := math.Inf(1)
		for _, w := range stop {
			ratio = math.Min(ratio, math.Abs(w*w-pass[0]*pass[1])/(w*(pass[1]-pass[0])))
		}
		return pass, ratio
	}
	centre := stop[0] * stop[1]
	if pass[0]*pass[1] > centre {
		pass[1] = centre / pass[0]
	} else {
		pass[0] = centre / pass[1]
	}
	return pass, (pass[1] - pass[0]) / (stop[1] - stop[0])
}
