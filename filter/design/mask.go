package design

import (
	"fmt"
	"math"
)

// Mask is a magnitude specification with edges. In the passband the magnitude
// lies within plus and minus RippleDB of 0 dB, in the stopband at or under
// -RejectDB, in the transition at or under the passband's upper bound.
//
// Pass and Stop hold the edges in Hz: one for Lowpass and Highpass (index 0,
// the other must be 0), lower and upper for the bands. The transitions of a
// band may differ in width.
type Mask struct {
	Kind       Kind
	Pass, Stop [2]float64
	RippleDB   float64 // plus and minus, above 0
	RejectDB   float64 // attenuation, above RippleDB
	Rate       float64
}

// MaskAround returns the mask whose transitions are width Hz wide and centred
// on the frequencies at (one, or lower and upper for a band), where a Kaiser
// design is then at -6 dB. The result may still be impossible: see Validate.
// It panics if at does not hold as many frequencies as the kind has edges.
func MaskAround(kind Kind, rate, width, rippleDB, rejectDB float64, at ...float64) Mask {
	if len(at) != kind.Edges() {
		panic(fmt.Sprintf("design: a %v lies around %d frequencies, not %d", kind, kind.Edges(), len(at)))
	}
	m := Mask{Kind: kind, RippleDB: rippleDB, RejectDB: rejectDB, Rate: rate}
	passesBelow := kind.passesDC()
	for i, hz := range at {
		half := width / 2
		if !passesBelow {
			half = -half
		}
		m.Pass[i], m.Stop[i] = hz-half, hz+half
		passesBelow = !passesBelow
	}
	return m
}

// Validate reports the first thing that no filter could satisfy: a frequency
// outside 0..rate/2, edges in the wrong order, a ripple or rejection that is
// not positive, a rejection not above the ripple.
func (m Mask) Validate() error {
	if err := checkEdges(m.Kind, m.Rate, m.Pass[:m.edges()]); err != nil {
		return fmt.Errorf("pass edge: %w", err)
	}
	if err := checkEdges(m.Kind, m.Rate, m.Stop[:m.edges()]); err != nil {
		return fmt.Errorf("stop edge: %w", err)
	}
	if m.edges() == 1 && (m.Pass[1] != 0 || m.Stop[1] != 0) {
		return fmt.Errorf("a %v has one pass and one stop edge, not two", m.Kind)
	}
	if err := m.checkOrderOfEdges(); err != nil {
		return err
	}
	return m.checkDecibels()
}

func (m Mask) edges() int { return m.Kind.Edges() }

func (m Mask) checkOrderOfEdges() error {
	below := m.Kind.passesDC()
	for i := range m.edges() {
		pass, stop := m.Pass[i], m.Stop[i]
		if below && !(pass < stop) {
			return fmt.Errorf("the pass edge %g Hz must lie below the stop edge %g Hz of a %v; swap or move them", pass, stop, m.Kind)
		}
		if !below && !(stop < pass) {
			return fmt.Errorf("the stop edge %g Hz must lie below the pass edge %g Hz of a %v; swap or move them", stop, pass, m.Kind)
		}
		below = !below
	}
	return nil
}

func (m Mask) checkDecibels() error {
	switch {
	case !(m.RippleDB > 0) || math.IsInf(m.RippleDB, 1):
		return fmt.Errorf("a ripple of %g dB is not above 0 dB; 0.1 dB is usual", m.RippleDB)
	case !(m.RejectDB > 0) || math.IsInf(m.RejectDB, 1):
		return fmt.Errorf("a rejection of %g dB is not above 0 dB; give the attenuation as a positive number", m.RejectDB)
	case !(m.RejectDB > m.RippleDB):
		return fmt.Errorf("a rejection of %g dB is not above the ripple of %g dB; raise the rejection or lower the ripple", m.RejectDB, m.RippleDB)
	}
	return nil
}

// region is where a frequency lies in a mask.
type region int

const (
	passband region = iota
	transition
	stopband
)

func (m Mask) regionAt(hz float64) region {
	switch m.Kind {
	case Lowpass:
		return side(m.Pass[0]-hz, hz-m.Stop[0])
	case Highpass:
		return side(hz-m.Pass[0], m.Stop[0]-hz)
	case Bandpass:
		return side(math.Min(hz-m.Pass[0], m.Pass[1]-hz), math.Max(m.Stop[0]-hz, hz-m.Stop[1]))
	}
	return side(math.Max(m.Pass[0]-hz, hz-m.Pass[1]), math.Min(hz-m.Stop[0], m.Stop[1]-hz))
}

// side takes how far inside the passband and the stopband a frequency is.
func side(intoPass, intoStop float64) region {
	switch {
	case intoPass >= 0:
		return passband
	case intoStop >= 0:
		return stopband
	}
	return transition
}

// Bounds returns the least and the greatest allowed magnitude (linear) at hz,
// 0..Rate/2; edges belong to the passband and to the stopband. In a transition
// everything from 0 to the passband's maximum is allowed.
func (m Mask) Bounds(hz float64) (lo, hi float64) { return m.BoundsFunc()(hz) }

// BoundsFunc returns Bounds for many frequencies: powers of ten are taken once.
func (m Mask) BoundsFunc() func(hz float64) (lo, hi float64) {
	least, most, rejected := fromDB(-m.RippleDB), fromDB(m.RippleDB), fromDB(-m.RejectDB)
	return func(hz float64) (lo, hi float64) {
		switch m.regionAt(hz) {
		case passband:
			return least, most
		case stopband:
			return 0, rejected
		}
		return 0, most
	}
}

func fromDB(db float64) float64 { return math.Pow(10, db/20) }

func toDB(magnitude float64) float64 { return 20 * math.Log10(magnitude) }

// Narrowest returns the width in Hz of the mask's narrowest transition.
func (m Mask) Narrowest() float64 {
	width := math.Abs(m.Pass[0] - m.Stop[0])
	if m.edges() == 2 {
		width = math.Min(width, math.Abs(m.Pass[1]-m.Stop[1]))
	}
	return width
}
