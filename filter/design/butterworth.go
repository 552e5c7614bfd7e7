package design

import (
	"fmt"
	"math"
)

// Butterworth returns the maximally flat filter of a prototype order 1..32
// whose response is -3.01 dB (half power) at the edges: one for a low-pass or
// high-pass, the lower and the upper for a band. A band filter has 2*order
// poles. The transform is the bilinear one, prewarped at the edges, so the
// magnitude is exactly
//
//	|H| = 1/sqrt(1 + x^(2 order)),  x = tan(pi f/rate)/tan(pi edge/rate)
//
// for the low-pass, 1/x in place of x for the high-pass, and for the bands
// x = |w^2 - lo hi|/(w (hi - lo)), inverted for the band-stop, with all three
// frequencies prewarped.
//
// Errors: order out of range; a wrong number of edges, edges out of order, an
// edge not between 0 and half the rate. Source: Butterworth (1930); Parks &
// Burrus (1987), chapter 7.
func Butterworth(kind Kind, order int, rate float64, edges ...float64) (ZPK, error) {
	warped, err := prepare(kind, order, rate, edges)
	if err != nil {
		return ZPK{}, fmt.Errorf("butterworth %v: %w", kind, err)
	}
	return butterworthPrototype(order).transformed(kind, warped).digital(), nil
}

// prepare checks what all recursive families ask for and prewarps the edges.
func prepare(kind Kind, order int, rate float64, edges []float64) ([]float64, error) {
	if err := checkOrder(order); err != nil {
		return nil, err
	}
	if err := checkEdges(kind, rate, edges); err != nil {
		return nil, err
	}
	return prewarpAll(edges, rate), nil
}

func prewarpAll(edges []float64, rate float64) []float64 {
	warped := make([]float64, len(edges))
	for i, hz := range edges {
		warped[i] = prewarp(hz, rate)
	}
	return warped
}

// butterworthPrototype has its poles on the left half of the unit circle, in
// exact conjugates, the real one of an odd order last.
func butterworthPrototype(order int) analogue {
	var poles []complex128
	for k := 0; k < order/2; k++ {
		sin, cos := math.Sincos(math.Pi * float64(2*k+1) / float64(2*order))
		poles = append(poles, complex(-sin, cos), complex(-sin, -cos))
	}
	if order%2 == 1 {
		poles = append(poles, -1)
	}
	return analogue{poles: poles, gain: 1}
}
