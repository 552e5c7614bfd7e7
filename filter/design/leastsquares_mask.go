package design

import (
	"fmt"
	"math"
)

// LeastSquaresFor returns a weighted least-squares kernel that meets the mask:
// an odd number of taps, symmetric (type I), delay (n-1)/2. The weight between
// passband and stopband is adapted at each length until both are as far within
// the mask, as measured; the length is the least odd one that then meets it.
// It is longer than the equiripple kernel: the deviation gathers at the
// edges and falls away from them, which keeps the stopband's noise low. Where
// the gain swings out in a wide transition beside a narrow one, the wide one
// becomes a band with a straight fall and a small weight.
//
// Errors: what Validate reports; more than MaxLeastSquares taps needed; a gain
// in the transitions that no length near the estimate keeps down.
func LeastSquaresFor(m Mask) ([]float64, error) {
	if err := m.Validate(); err != nil {
		return nil, fmt.Errorf("least squares %v: %w", m.Kind, err)
	}
	estimate := equirippleLength(m)
	if !(estimate <= MaxLeastSquares) {
		return nil, squaresTooLong(m, estimate)
	}
	f := squaresFit{mask: m, stopWeight: 1}
	n := leastOdd(int(1.15*estimate), MaxLeastSquares, f.meets)
	switch {
	case f.failed != nil:
		return nil, fmt.Errorf("least squares %v: %w; or use the family kaiser", m.Kind, f.failed)
	case n > MaxLeastSquares:
		return nil, squaresTooLong(m, float64(n))
	}
	return f.best, nil
}

func squaresTooLong(m Mask, taps float64) error {
	return fmt.Errorf("least squares %v: about %.0f taps are needed, more than %d; widen the transition, lower the rejection, make the transitions alike, or use the family kaiser",
		m.Kind, taps, MaxLeastSquares)
}

// squaresFit adapts the weight and keeps the shortest kernel that met.
type squaresFit struct {
	mask       Mask
	stopWeight float64 // against the mask's own, kept from length to length
	guard      float64 // weight of the guards of wide transitions, against the mask's own
	best       []float64
	failed     error
}

func (f *squaresFit) meets(n int) bool {
	const rounds = 8
	for range rounds {
		if f.failed != nil {
			return false
		}
		taps, err := leastSquares(f.spec(n))
		if err != nil {
			f.failed = err
			return false
		}
		got := MeasureTaps(taps, f.mask)
		if got.Meets(f.mask) {
			if f.best == nil || n < len(f.best) {
				f.best = taps
			}
			return true
		}
		if !f.adapt(got) {
			return false
		}
	}
	return false
}

// spec squares the mask's weights, since the squares of deviations are weighed.
func (f *squaresFit) spec(n int) BandSpec {
	s := BandSpec{Taps: n, Rate: f.mask.Rate, Bands: f.mask.bands()}
	for i := range s.Bands {
		b := &s.Bands[i]
		b.Weight *= b.Weight
		if b.GainFrom == 0 {
			b.Weight *= f.stopWeight
		}
	}
	if f.guard > 0 {
		for _, b := range f.guards() {
			b.Weight *= b.Weight * f.guard
			s.Bands = append(s.Bands, b)
		}
		ordered(s.Bands)
	}
	return s
}

// adapt moves the weight towards the worse side, or guards the transitions if
// the gain swings out there, and reports false where only more taps help.
func (f *squaresFit) adapt(got Measured) bool {
	pass := (fromDB(got.RippleDB) - 1) / (fromDB(f.mask.RippleDB) - 1)
	stop := fromDB(f.mask.RejectDB - got.RejectDB)
	switch {
	case pass > 1 && stop > 1:
		return false
	case pass > 1 || stop > 1:
		f.stopWeight *= math.Pow(stop/pass, 1.5)
		return true
	}
	f.guard = math.Max(1e-4, 10*f.guard)
	return f.guard < 1 && len(f.guards()) > 0
}

func (f *squaresFit) guards() []Band { return f.mask.guards(1./8, true) }
