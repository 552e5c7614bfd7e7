package design

import (
	"fmt"
	"math"
)

// Chebyshev1 returns the Chebyshev filter of the first kind of a prototype
// order 1..32: in the passband the magnitude ripples between 0 dB and
// -rippleDB, outside it falls without end. The edges are the last frequencies
// of the passband at -rippleDB, one for a low-pass or high-pass, lower and
// upper for a band. With x as at Butterworth the magnitude is exactly
//
//	|H| = 1/sqrt(1 + (10^(rippleDB/10) - 1) T^2(x)),  T = cosh(order acosh x)
//
// An even order has -rippleDB where x = 0: at 0 Hz for a low-pass.
//
// Errors: as Butterworth; a ripple not above 0 dB. Source: Parks & Burrus
// (1987), chapter 7.
func Chebyshev1(kind Kind, order int, rate, rippleDB float64, edges ...float64) (ZPK, error) {
	warped, err := prepare(kind, order, rate, edges)
	if err == nil {
		err = quantity{"ripple in dB", rippleDB}.check()
	}
	if err != nil {
		return ZPK{}, fmt.Errorf("chebyshev1 %v: %w", kind, err)
	}
	return chebyshev1Prototype(order, rippleDB).transformed(kind, warped).digital(), nil
}

// Chebyshev2 returns the Chebyshev filter of the second kind (inverse
// Chebyshev) of a prototype order 1..32: the passband is maximally flat, in the
// stopband the magnitude ripples between 0 and -rejectDB. The edges are the
// first frequencies of the stopband at -rejectDB, one for a low-pass or
// high-pass, lower and upper for a band (for a band-stop, of the band that is
// stopped). With x and T as at Chebyshev1 the magnitude is exactly
//
//	|H| = 1/sqrt(1 + (10^(rejectDB/10) - 1)/T^2(1/x))
//
// Errors: as Butterworth; a rejection not above 0 dB. Source: Parks & Burrus
// (1987), chapter 7.
func Chebyshev2(kind Kind, order int, rate, rejectDB float64, edges ...float64) (ZPK, error) {
	warped, err := prepare(kind, order, rate, edges)
	if err == nil {
		err = quantity{"rejection in dB", rejectDB}.check()
	}
	if err != nil {
		return ZPK{}, fmt.Errorf("chebyshev2 %v: %w", kind, err)
	}
	return chebyshev2Prototype(order, rejectDB).transformed(kind, warped).digital(), nil
}

// deviation returns sqrt(10^(db/10) - 1), without cancellation at small db.
func deviation(db float64) float64 { return math.Sqrt(math.Expm1(db * math.Ln10 / 10)) }

// chebyshev1Prototype has its passband edge at 1 rad/s. The poles of an order
// lie on an ellipse with half axes sinh and cosh of asinh(1/epsilon)/order, at
// the angles of the Butterworth poles. Its gain is that of 1/(epsilon T) at
// high frequencies, 2^(1-order)/epsilon, whatever the parity of the order.
func chebyshev1Prototype(order int, rippleDB float64) analogue {
	epsilon := deviation(rippleDB)
	a := butterworthPrototype(order)
	a.poles = onEllipse(a.poles, math.Asinh(1/epsilon)/float64(order))
	a.gain = math.Ldexp(1/epsilon, 1-order)
	return a
}

func onEllipse(circle []complex128, width float64) []complex128 {
	re, im := math.Sinh(width), math.Cosh(width)
	for i, p := range circle {
		circle[i] = complex(re*real(p), im*imag(p))
	}
	return circle
}

// chebyshev2Prototype has its stopband edge at 1 rad/s: the poles are the
// reciprocals of those of a first kind, the zeros those of T(1/x). The real
// pole of an odd order, which is last, has its zero at infinity.
func chebyshev2Prototype(order int, rejectDB float64) analogue {
	circle := butterworthPrototype(order).poles
	var zeros []complex128
	for _, p := range circle[:order&^1] {
		zeros = append(zeros, complex(0, 1/imag(p)))
	}
	a := analogue{zeros: zeros, poles: onEllipse(circle, math.Asinh(deviation(rejectDB))/float64(order))}
	gain := complex(1, 0)
	for i, p := range a.poles {
		a.poles[i] = 1 / p
		gain *= -a.poles[i]
		if i < len(zeros) {
			gain /= -zeros[i]
		}
	}
	a.gain = real(gain)
	return a
}
