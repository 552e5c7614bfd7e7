package design

import (
	"fmt"
	"math"
	"math/cmplx"
)

// Bessel returns the filter of maximally flat group delay (Thomson) of a
// prototype order 1..32, normalised by magnitude: -3.01 dB (half power) at the
// edges, one for a low-pass or high-pass, lower and upper for a band.
//
// The flatness is that of the analogue low-pass. The bilinear transform does
// not keep it: it multiplies the delay by 1/cos^2(pi f/rate), 1 % more than at
// 0 Hz at f = rate/32, 17 % at rate/8. Neither high-pass nor band kinds have a
// flat delay, in analogue form either.
//
// Errors: as Butterworth. Source: Thomson, Delay networks having maximally flat
// frequency characteristics, Proceedings of the IEE 96, 1949; Parks & Burrus
// (1987), chapter 7.
func Bessel(kind Kind, order int, rate float64, edges ...float64) (ZPK, error) {
	return bessel("bessel", halfPowerBessel, kind, order, rate, edges)
}

// BesselDelay is Bessel normalised by delay: the edge of a low-pass is the
// frequency at for which the analogue prototype's group delay at 0 Hz is
// 1/(2 pi at) seconds, whatever the order. The digital filter has
// 1/(2 rate tan(pi at/rate)) seconds there, which is the same for low edges.
// The magnitude at the edge depends on the order (-3 dB at first order, -0.29
// dB at the eighth), so an edge is not where the filter cuts. For a high-pass
// the prototype's frequency axis is inverted about the edge, for a band its
// width is upper less lower edge, all prewarped.
func BesselDelay(kind Kind, order int, rate float64, edges ...float64) (ZPK, error) {
	return bessel("bessel by delay", unitDelayBessel, kind, order, rate, edges)
}

func bessel(name string, prototype func(int) analogue, kind Kind, order int, rate float64, edges []float64) (ZPK, error) {
	warped, err := prepare(kind, order, rate, edges)
	if err != nil {
		return ZPK{}, fmt.Errorf("%s %v: %w", name, kind, err)
	}
	return prototype(order).transformed(kind, warped).digital(), nil
}

// unitDelayBessel has a group delay of 1 s at 0 rad/s: its poles are the roots
// of the reverse Bessel polynomial.
func unitDelayBessel(order int) analogue {
	a := analogue{poles: besselRoots(order)}
	gain := complex(1, 0)
	for _, p := range a.poles {
		gain *= -p
	}
	a.gain = real(gain)
	return a
}

// halfPowerBessel is at half power at 1 rad/s.
func halfPowerBessel(order int) analogue { return unitDelayBessel(order).lossAtOne(10 * math.Log10(2)) }

// lossAtOne scales a prototype without zeros and with a falling magnitude so
// that its loss against 0 rad/s is lossDB at 1 rad/s. The frequency is found by
// halving an interval on a logarithmic axis, down to rounding.
func (a analogue) lossAtOne(lossDB float64) analogue {
	lo, hi := 1e-6, 1e6
	for hi/lo > 1+2e-16 {
		middle := math.Sqrt(lo * hi)
		if middle == lo || middle == hi {
			break
		}
		if a.loss(middle) < lossDB {
			lo = middle
		} else {
			hi = middle
		}
	}
	return a.scaled(1 / lo)
}

// loss returns the attenuation in dB at w rad/s against that at 0, for a
// prototype without zeros.
func (a analogue) loss(w float64) float64 {
	excess := 0.0
	for _, p := range a.poles {
		r := cmplx.Abs(p)
		excess += math.Log1p((w/r)*(w/r) - 2*w/r*(imag(p)/r))
	}
	return excess * 10 / math.Ln10
}
