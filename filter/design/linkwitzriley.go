package design

import "fmt"

// LinkwitzRiley returns the Linkwitz-Riley filter of an even prototype order
// 2..32: two equal Butterworth filters of half the order in cascade, so that
// the response is -6.02 dB at the edges, one for a low-pass or high-pass, lower
// and upper for a band. A low-pass and a high-pass of one order and edge are in
// phase everywhere if the order is a multiple of 4 (else after one of them is
// inverted), and their sum is then an all-pass: magnitude 1 at all frequencies.
//
// Errors: as Butterworth; an odd order. Source: Linkwitz, Active crossover
// networks for noncoincident drivers, Journal of the Audio Engineering Society
// 24(1), 1976.
func LinkwitzRiley(kind Kind, order int, rate float64, edges ...float64) (ZPK, error) {
	warped, err := prepare(kind, order, rate, edges)
	if err == nil && order%2 == 1 {
		err = fmt.Errorf("order %d is odd, and the filter is two equal ones in cascade; choose %d", order, order+1)
	}
	if err != nil {
		return ZPK{}, fmt.Errorf("linkwitz-riley %v: %w", kind, err)
	}
	return linkwitzRileyPrototype(order).transformed(kind, warped).digital(), nil
}

func linkwitzRileyPrototype(order int) analogue {
	a := butterworthPrototype(order / 2)
	a.poles = append(a.poles, a.poles...)
	return a
}
