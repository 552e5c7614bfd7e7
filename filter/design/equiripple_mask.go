package design

import (
	"errors"
	"fmt"
	"math"
)

// Equiripple returns the shortest kernel that meets the mask: an odd number of
// taps, symmetric (type I), delay (n-1)/2, by the Parks-McClellan method.
// The passband swings about the middle of the allowed gains, not about 0 dB,
// so a low-pass does not have a gain of exactly 1 at 0 Hz.
//
// The formula of Herrmann, Rabiner & Chan gives a first length; the least odd
// one whose deviation is within the mask is then searched, and the result
// measured on a dense grid. Where the gain swings out in a wide transition
// beside a narrow one, the wide one is held down as one more band.
//
// Errors: what Validate reports; more than MaxEquiripple taps needed; those of
// ParksMcClellan. They say to use the family kaiser; no other method is
// taken in silence.
//
// Source: Herrmann, Rabiner & Chan, Bell System Technical Journal 52 (1973)
// 769-799.
func Equiripple(m Mask) ([]float64, error) {
	if err := m.Validate(); err != nil {
		return nil, fmt.Errorf("equiripple %v: %w", m.Kind, err)
	}
	taps, err := equirippleFrom(m, m.bands())
	for _, share := range []float64{1. / 4, 1. / 16} {
		if guards := m.guards(share, false); errors.Is(err, errOvershoot) && len(guards) > 0 {
			taps, err = equirippleFrom(m, ordered(append(m.bands(), guards...)))
		}
	}
	if err != nil {
		return nil, fmt.Errorf("equiripple %v: %w; or use the family kaiser", m.Kind, err)
	}
	return taps, nil
}

// equirippleFrom searches the length for bands whose deviation must not be
// above 1, and measures against the mask.
func equirippleFrom(m Mask, bands []Band) ([]float64, error) {
	estimate := equirippleLength(m)
	if !(estimate <= 2*MaxEquiripple) {
		return nil, tooLongForExchange(estimate)
	}
	s := BandSpec{Rate: m.Rate, Bands: bands}
	var failed error
	n := leastOdd(int(estimate), MaxEquiripple, func(n int) bool {
		if failed != nil {
			return true
		}
		s.Taps = n
		within, err := s.withinOne()
		failed = unlessNarrow(err)
		return within
	})
	if failed != nil {
		return nil, fmt.Errorf("%d taps: %w", s.Taps, failed)
	}
	return s.measuredFrom(n, m)
}

// withinOne tells whether the least deviation is at most 1. A sketch mostly
// decides: its deviation is a lower bound, and its highest extremum an upper
// one but for the few per cent between the points of its grid.
func (s BandSpec) withinOne() (bool, error) {
	d, err := sketch(s)
	if err == nil && !(d.deviation() <= 1) || err == nil && d.peak <= 0.95 {
		return d.peak <= 0.95, nil
	}
	if d, err = exchange(s, RemezOptions{}, true); err != nil {
		return false, err
	}
	return d.deviation() <= 1, nil
}

// unlessNarrow drops the error of a length so short that its grid does not
// hold all extrema: it only means that more taps are needed.
func unlessNarrow(err error) error {
	if errors.Is(err, errNarrow) {
		return nil
	}
	return err
}

// measuredFrom returns the first kernel from n taps on that meets the mask as
// measured. A deviation of 1 can be over by rounding; more than a few taps
// more mean that something else is wrong.
func (s BandSpec) measuredFrom(n int, asked Mask) ([]float64, error) {
	const attempts = 3
	var got Measured
	for s.Taps = n; s.Taps < n+2*attempts; s.Taps += 2 {
		if s.Taps > MaxEquiripple {
			return nil, tooLongForExchange(float64(s.Taps))
		}
		d, err := exchange(s, RemezOptions{}, true)
		if err != nil {
			return nil, err
		}
		taps := s.tapsOf(d)
		if got = MeasureTaps(taps, asked); got.Meets(asked) {
			return taps, nil
		}
	}
	if got.OvershootDB > asked.RippleDB {
		return nil, fmt.Errorf("%w: %.3g dB at %d taps; make the transitions alike", errOvershoot, got.OvershootDB, n)
	}
	return nil, fmt.Errorf("%d taps reach a ripple of %.4g dB and a rejection of %.4g dB where %g dB and %g dB are asked; widen the transition or lower the rejection",
		n, got.RippleDB, got.RejectDB, asked.RippleDB, asked.RejectDB)
}

func tooLongForExchange(taps float64) error {
	return fmt.Errorf("about %.0f taps are needed, more than %d; widen the transition or lower the rejection", taps, MaxEquiripple)
}

// equirippleLength estimates the taps of a low-pass with the mask's narrowest
// transition: D(d1, d2)/width - f(d1, d2) width + 1, with d1 the larger of the
// two deviations (Herrmann, Rabiner & Chan 1973, eq. 7 to 9).
func equirippleLength(m Mask) float64 {
	pass := (fromDB(m.RippleDB) - fromDB(-m.RippleDB)) / (fromDB(m.RippleDB) + fromDB(-m.RippleDB))
	stop := fromDB(-m.RejectDB)
	p, q := math.Log10(math.Max(pass, stop)), math.Log10(math.Min(pass, stop))
	d := (0.005309*p*p+0.07114*p-0.4761)*q - (0.00266*p*p + 0.5941*p + 0.4278)
	f := 11.01217 + 0.51244*(p-q)
	width := m.Narrowest() / m.Rate
	return math.Max(1, d/width-f*width+1)
}
