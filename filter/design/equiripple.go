package design

import (
	"errors"
	"fmt"
	"math"

	"fettle/filter/response"
)

// MaxEquiripple is the longest kernel that ParksMcClellan designs; the work
// grows with the square of the length.
const MaxEquiripple = 4095

// RemezOptions tune ParksMcClellan. The zero value is the accurate design.
type RemezOptions struct {
	// Grid is the number of grid points to one term of the amplitude, over
	// 0..rate/2. 0 means a grid laid by the bands' own width with every
	// extremum sought between its points: the least possible deviation. Any
	// other number keeps to the points, as the published program does, whose
	// own number is 16.
	Grid int
	// OvershootDB is how far the gain between the bands may rise above the
	// highest gain inside them; 0 means 1 dB.
	OvershootDB float64
}

// Causes of failure of an equiripple design, for errors.Is within the package.
var (
	errNarrow    = errors.New("a band is too narrow")
	errTooEasy   = errors.New("the deviation is below rounding error")
	errStuck     = errors.New("the exchange does not converge")
	errOvershoot = errors.New("the gain between the bands is too high")
)

// ParksMcClellan returns the kernel whose largest weighted deviation from the
// bands is the least possible, and that deviation: in a band of weight w the
// gain errs by at most deviation/w. All four linear-phase types are designed.
//
// The method is the Remez exchange with barycentric interpolation. It starts
// from Leja points, runs on a coarse grid first, and seeks each extremum
// between the grid's points. The taps are measured again, transitions included,
// before they are returned.
//
// Errors: what BandSpec.Validate reports; bands that touch; more than
// MaxEquiripple taps; a band narrower than one step of the grid; a
// specification so easy that the deviation drowns in rounding; an exchange that
// does not converge; a gain between the bands above OvershootDB.
//
// Sources: Parks & McClellan, IEEE Trans. Circuit Theory CT-19 (1972) 189-194;
// McClellan, Parks & Rabiner, IEEE Trans. Audio Electroacoust. AU-21 (1973)
// 506-526; Berrut & Trefethen, Barycentric Lagrange interpolation, SIAM Review
// 46 (2004) 501-517.
func ParksMcClellan(s BandSpec, o RemezOptions) (taps []float64, deviation float64, err error) {
	taps, deviation, err = parksMcClellan(s, o)
	if err != nil {
		return nil, 0, fmt.Errorf("equiripple, %d taps: %w", s.Taps, err)
	}
	return taps, deviation, nil
}

func parksMcClellan(s BandSpec, o RemezOptions) ([]float64, float64, error) {
	if err := s.checkRemez(o); err != nil {
		return nil, 0, err
	}
	if g, constant := s.constantGain(); constant && (g == 0 || s.Type() == response.TypeI) {
		return nil, 0, fmt.Errorf("every band asks for a gain of %g, which one tap has; give the bands different gains", g)
	}
	d, err := exchange(s, o, false)
	if err != nil {
		return nil, 0, err
	}
	taps := s.tapsOf(d)
	return taps, d.deviation(), s.verify(taps, d.deviation(), o.overshoot())
}

func (o RemezOptions) overshoot() float64 {
	if o.OvershootDB == 0 {
		return 1
	}
	return o.OvershootDB
}

func (s BandSpec) checkRemez(o RemezOptions) error {
	if err := s.Validate(); err != nil {
		return err
	}
	for i := 1; i < len(s.Bands); i++ {
		if s.Bands[i-1].To == s.Bands[i].From {
			return fmt.Errorf("%v and %v touch; leave a transition between them", s.Bands[i-1], s.Bands[i])
		}
	}
	switch {
	case s.Taps > MaxEquiripple:
		return fmt.Errorf("more than %d taps are not designed by exchange; use the family kaiser", MaxEquiripple)
	case s.cosines() < 1:
		return fmt.Errorf("one tap cannot be antisymmetric; ask for at least 2")
	case o.Grid != 0 && (o.Grid < 4 || o.Grid > 4096):
		return fmt.Errorf("a grid of %d points to an extremum is not between 4 and 4096; 16 is usual", o.Grid)
	case !(o.OvershootDB >= 0):
		return fmt.Errorf("an overshoot of %g dB is not 0 dB or more", o.OvershootDB)
	}
	return nil
}

// cosines returns how many terms cos(k omega), k from 0, the amplitude of the
// type has beside its fixed factor.
func (s BandSpec) cosines() int {
	if s.Taps%2 == 1 && !s.Antisymmetric {
		return (s.Taps + 1) / 2
	}
	return s.Taps / 2
}

// deviation of the reference's own equation, which the extrema agree with.
func (d *solution) deviation() float64 { return math.Abs(d.curve.delta) }
