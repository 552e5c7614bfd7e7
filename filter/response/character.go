package response

import (
	"fmt"
	"math"
	"math/cmplx"
)

// Character says what kind of filter a System is.
type Character struct {
	// Linear is the linear-phase type of a system that is a kernel alone, or
	// a kernel with sections run both ways; None for all others: a recursive
	// filter that runs one way cannot be linear-phase, since its poles would
	// need partners outside the unit circle.
	Linear Kind
	// Inside, On and Outside count the zeros by the unit circle, those at
	// infinity (a first tap of 0: delay) as outside. Of a kernel of N taps a
	// zero within Blur/N of the circle counts as on it.
	Inside, On, Outside int
	// Margin is 1 less the largest pole radius; 1 without poles. The system
	// is stable if it is above 0.
	Margin float64
	// Causal tells that no output comes before its input.
	Causal bool
}

// Blur is how near to the unit circle a kernel's zero counts as on it, in
// 1/taps: nearer ones a grid of that kernel's own resolution cannot part.
const Blur = 0.3

// Phase names the phase: "linear", "minimum" (no zero outside), "maximum" (none
// inside), "mixed", or "none" for a system without zeros or phase.
func (c Character) Phase() string {
	switch {
	case c.Linear != None:
		return "linear"
	case c.Outside == 0:
		return "minimum"
	case c.Inside == 0:
		return "maximum"
	}
	return "mixed"
}

// String is a phrase for a report.
func (c Character) String() string {
	s := c.Phase() + " phase"
	if c.Phase() == "mixed" {
		s += fmt.Sprintf(", %d of %d zeros outside the unit circle", c.Outside, c.Inside+c.On+c.Outside)
	}
	if c.Linear != None {
		s += " of " + c.Linear.String()
	}
	if c.Margin < 1 {
		s += fmt.Sprintf(", poles %.2g inside the unit circle", c.Margin)
	}
	if !c.Causal {
		s += ", not causal"
	}
	return s
}

// Character classifies the system. A kernel counts as symmetric within tol of
// its largest tap (see Symmetry). Zeros of a long kernel are counted, not
// found: by how often H turns round 0 on circles just inside and outside the
// unit circle (the argument principle).
func (s System) Character(tol float64) Character {
	c := Character{Margin: 1, Causal: len(s.Zero) == 0}
	if all := append(append([]Section(nil), s.Sections...), s.Zero...); len(all) > 0 {
		c.Margin = 1 - MaxPoleRadius(all)
	}
	if len(s.Sections) == 0 {
		c.Linear = TypeI // the one tap 1
		if s.Taps != nil {
			c.Linear = Symmetry(s.Taps, tol)
		}
	}
	c.countTaps(s.Taps)
	for _, section := range s.Sections {
		c.countSection(section, 1)
	}
	for _, section := range s.Zero { // and its mirror in time
		c.countSection(section, 1)
		c.countSection(section, -1)
	}
	return c
}

// onCircle is how near to the unit circle a section's zero counts as on it.
const onCircle = 1e-9

func (c *Character) countSection(s Section, way int) {
	zeros := s.Zeros()
	if s.B0 == 0 && (s.B1 != 0 || s.B2 != 0) {
		c.Outside++ // a delay: a zero at infinity
	}
	for _, z := range zeros {
		switch r := cmplx.Abs(z); {
		case math.Abs(r-1) <= onCircle:
			c.On++
		case (r < 1) == (way > 0):
			c.Inside++
		default:
			c.Outside++
		}
	}
}

func (c *Character) countTaps(taps []float64) {
	for len(taps) > 0 && taps[0] == 0 {
		taps = taps[1:]
		c.Outside++
	}
	for len(taps) > 0 && taps[len(taps)-1] == 0 {
		taps = taps[:len(taps)-1]
		c.Inside++
	}
	if len(taps) < 2 {
		return
	}
	blur := Blur / float64(len(taps))
	outside := turnsWithin(taps, 1-blur)
	notInside := len(taps) - 1 - outside // a symmetric kernel's zeros are mirrored in the circle
	if c.Linear == None {
		notInside = turnsWithin(taps, 1/(1-blur))
	}
	c.Outside += outside
	c.On += notInside - outside
	c.Inside += len(taps) - 1 - notInside
}

// turnsWithin counts the roots x = 1/z of P(x) = sum h[n] x^n with |x| < radius, by how
// often P turns round 0 while x goes round the circle once: the quarters of the plane
// that it passes on the upper half, two for each root.
func turnsWithin(taps []float64, radius float64) int {
	scaled := make([]float64, len(taps))
	gain := 1.0
	for n, h := range taps {
		scaled[n] = h * gain
		gain *= radius
	}
	size := NextPow2(64 * len(taps))
	spectrum := Spectrum(scaled, size)
	for _, end := range []int{0, size / 2} { // real but for rounding
		spectrum[end] = complex(real(spectrum[end]), 0)
	}
	quarters := 0
	for k := range size / 2 {
		quarters += passed(scaled, spectrum[k], spectrum[k+1], 2*math.Pi*float64(k)/float64(size), 2*math.Pi/float64(size))
	}
	return -quarters / 2 // x goes round one way while omega goes the other
}

// finestStep is where the search for a turn's way ends: a root on the circle has none.
const finestStep = 2 * math.Pi / (1 << 24)

// passed counts the quarters that H passes, upwards, from a at omega to b a step
// further. A turn of a quarter or more is halved until its way is plain.
func passed(taps []float64, a, b complex128, omega, step float64) int {
	if inPhase(a, b) > 0 || step < finestStep {
		return (quarter(b)-quarter(a)+5)%4 - 1
	}
	middle := TapsAt(taps, omega+step/2)
	return passed(taps, a, middle, omega, step/2) + passed(taps, middle, b, omega+step/2, step/2)
}

// quarter numbers the quarters of the plane upwards from the positive real axis, each
// with the axis that it begins at.
func quarter(c complex128) int {
	switch re, im := real(c), imag(c); {
	case re > 0 && im >= 0:
		return 0
	case re <= 0 && im > 0:
		return 1
	case re < 0:
		return 2
	}
	return 3
}
