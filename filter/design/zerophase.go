package design

import (
	"fmt"
	"math"
)

// A forward and backward run squares a filter's magnitude. The functions here
// design the half: the filter whose square is, or comes near to, what was asked.

// HalfWidth is the factor on the width of a first-order zero (a notch, a DC
// blocker) whose square has the -3 dB width asked for:
// x^2/(x^2 + w^2) = 1/sqrt 2 at x = 1, so w = sqrt(sqrt 2 - 1).
var HalfWidth = math.Sqrt(math.Sqrt2 - 1)

// HalfButterworth returns the filter of half the order whose square is
// -3.01 dB at the edges of a Butterworth of an even order: its own corner is
// moved by (sqrt 2 - 1)^(1/order) in the bilinear variable. The square's
// stopband ends 7.7 dB higher than the Butterworth's, and its passband droops
// at most 0.7 dB more. An odd order is an error that names the even ones beside
// it; so are those of Butterworth.
func HalfButterworth(kind Kind, order int, rate float64, edges ...float64) (ZPK, error) {
	if order%2 == 1 {
		return ZPK{}, fmt.Errorf("order %d is odd, and half of it runs each way; use order %d", order, order+1)
	}
	if _, err := prepare(kind, order, rate, edges); err != nil {
		return ZPK{}, fmt.Errorf("butterworth %v: %w", kind, err)
	}
	factor := math.Pow(math.Sqrt2-1, 1/float64(order))
	if kind == Lowpass || kind == Bandpass {
		factor = 1 / factor
	}
	warped := prewarpAll(edges, rate)
	if kind.Edges() == 1 {
		warped[0] *= factor
	} else {
		// The same centre, the width times the factor.
		half, square := factor*(warped[1]-warped[0])/2, warped[0]*warped[1]
		root := math.Sqrt(half*half + square)
		warped[0], warped[1] = root-half, root+half
	}
	moved := make([]float64, len(edges))
	for i, w := range warped {
		moved[i] = math.Atan(w) * rate / math.Pi
	}
	return Butterworth(kind, order/2, rate, moved...)
}
