package design

import (
	"fmt"
	"math"

	"fettle/filter/response"
)

// The sections of this file follow Bristow-Johnson, Audio EQ Cookbook (W3C
// Working Group Note, 8 June 2021): f0 in Hz, w0 = 2 pi f0/rate,
// A = 10^(gain/40), alpha = sin(w0)/(2 q). All return an error for an f0 not
// between 0 and half the rate, for a q or slope that is not positive, and for a
// gain that is not finite.

// corner holds what the cookbook's formulas share.
type corner struct{ cos, sin float64 }

func newCorner(rate, f0 float64, positive quantity) (corner, error) {
	if err := checkFrequency(f0, rate); err != nil {
		return corner{}, err
	}
	if err := positive.check(); err != nil {
		return corner{}, err
	}
	sin, cos := math.Sincos(2 * math.Pi * f0 / rate)
	return corner{cos, sin}, nil
}

// quantity is a parameter that must be above 0.
type quantity struct {
	name  string
	value float64
}

func (q quantity) check() error {
	if !(q.value > 0) || math.IsInf(q.value, 1) {
		return fmt.Errorf("a %s of %g is not above 0; choose a positive number", q.name, q.value)
	}
	return nil
}

func checkGain(gainDB float64) error {
	if !(math.Abs(gainDB) <= 200) {
		return fmt.Errorf("a gain of %g dB is not between -200 dB and 200 dB", gainDB)
	}
	return nil
}

// normalised divides by a0.
func normalised(b0, b1, b2, a0, a1, a2 float64) response.Section {
	return response.Section{B0: b0 / a0, B1: b1 / a0, B2: b2 / a0, A1: a1 / a0, A2: a2 / a0}
}

// BandwidthQ returns the q of a bandwidth in octaves at f0 Hz by the cookbook's
// warped relation 1/q = 2 sinh(ln 2/2 octaves w0/sin w0). The bandwidth lies
// between -3 dB points for a notch, between half-gain points for a bell. Not a
// positive number if the arguments are not, or f0 is at half the rate.
func BandwidthQ(rate, f0, octaves float64) float64 {
	w0 := 2 * math.Pi * f0 / rate
	return 1 / (2 * math.Sinh(math.Ln2/2*octaves*w0/math.Sin(w0)))
}

// Bell returns a peaking section: gainDB at f0, 0 dB at 0 Hz and at half the
// rate. In the cookbook's definition A q is the classic Q, so that a bell of
// -gainDB is the exact inverse.
func Bell(rate, f0, gainDB, q float64) (response.Section, error) {
	c, err := newCorner(rate, f0, quantity{"q", q})
	if err == nil {
		err = checkGain(gainDB)
	}
	if err != nil {
		return response.Section{}, fmt.Errorf("bell: %w", err)
	}
	a, alpha := fromDB(gainDB/2), c.sin/(2*q)
	return normalised(1+alpha*a, -2*c.cos, 1-alpha*a, 1+alpha/a, -2*c.cos, 1-alpha/a), nil
}

// LowShelf returns a shelf with gainDB at 0 Hz, half of it at f0 and 0 dB at
// half the rate. q = 1/sqrt(2) is the steepest without overshoot at any gain.
func LowShelf(rate, f0, gainDB, q float64) (response.Section, error) {
	return shelf("low shelf", rate, f0, gainDB, quantity{"q", q}, 1)
}

// LowShelfSlope is LowShelf by the cookbook's slope S, 1 being the steepest
// without overshoot: the slope in dB an octave is proportional to it.
func LowShelfSlope(rate, f0, gainDB, slope float64) (response.Section, error) {
	return shelf("low shelf", rate, f0, gainDB, quantity{"slope", slope}, 1)
}

// HighShelf returns a shelf with gainDB at half the rate, half of it at f0 and
// 0 dB at 0 Hz.
func HighShelf(rate, f0, gainDB, q float64) (response.Section, error) {
	return shelf("high shelf", rate, f0, gainDB, quantity{"q", q}, -1)
}

// HighShelfSlope is HighShelf by the cookbook's slope S; see LowShelfSlope.
func HighShelfSlope(rate, f0, gainDB, slope float64) (response.Section, error) {
	return shelf("high shelf", rate, f0, gainDB, quantity{"slope", slope}, -1)
}

// ShelfQ returns the q of a shelf of gainDB with the cookbook's slope S:
// 1/q^2 = (A + 1/A)(1/S - 1) + 2. It fails for a slope that is not positive or
// too steep to exist, and for a gain beyond 200 dB.
func ShelfQ(gainDB, slope float64) (q float64, err error) {
	if err := (quantity{"slope", slope}).check(); err != nil {
		return 0, err
	}
	if err := checkGain(gainDB); err != nil {
		return 0, err
	}
	a := fromDB(gainDB / 2)
	square := (a+1/a)*(1/slope-1) + 2
	if !(square > 0) {
		return 0, fmt.Errorf("a slope of %g is too steep for %g dB; the limit is %.4g, and 1 is the steepest without overshoot",
			slope, gainDB, (a+1/a)/(a+1/a-2))
	}
	return 1 / math.Sqrt(square), nil
}

// shelf serves both: a high shelf is a low shelf with z replaced by -z, which
// turns the sign of the cosine and of the odd coefficients (side = -1).
func shelf(name string, rate, f0, gainDB float64, steepness quantity, side float64) (response.Section, error) {
	c, err := newCorner(rate, f0, steepness)
	if err == nil {
		err = checkGain(gainDB)
	}
	if err != nil {
		return response.Section{}, fmt.Errorf("%s: %w", name, err)
	}
	q := steepness.value
	if steepness.name == "slope" {
		if q, err = ShelfQ(gainDB, q); err != nil {
			return response.Section{}, fmt.Errorf("%s: %w", name, err)
		}
	}
	a := fromDB(gainDB / 2)
	k := math.Sqrt(a) * c.sin / q
	cos := side * c.cos
	return normalised(
		a*((a+1)-(a-1)*cos+k), side*2*a*((a-1)-(a+1)*cos), a*((a+1)-(a-1)*cos-k),
		(a+1)+(a-1)*cos+k, -side*2*((a-1)+(a+1)*cos), (a+1)+(a-1)*cos-k), nil
}

// Notch returns the cookbook's notch at f0 with the given q, whose -3 dB width
// is f0/q in the limit of low f0; see NotchWidth for an exact one.
func Notch(rate, f0, q float64) (response.Section, error) {
	c, err := newCorner(rate, f0, quantity{"q", q})
	if err != nil {
		return response.Section{}, fmt.Errorf("notch: %w", err)
	}
	return notch(c, c.sin/(2*q)), nil
}

// NotchWidth returns a notch at f0 whose -3 dB points are exactly width Hz
// apart: alpha = tan(pi width/rate). With that alpha the points solve
// cos w +- alpha sin w = cos w0, that is sqrt(1+alpha^2) cos(w -+ atan alpha) =
// cos w0, so that they differ by 2 atan(alpha) whatever f0 is. The q of a chain
// file is f0/width. The width must be below half the rate.
func NotchWidth(rate, f0, width float64) (response.Section, error) {
	c, err := newCorner(rate, f0, quantity{"width in Hz", width})
	if err == nil {
		err = checkFrequency(width, rate)
	}
	if err != nil {
		return response.Section{}, fmt.Errorf("notch: %w", err)
	}
	return notch(c, prewarp(width, rate)), nil
}

func notch(c corner, alpha float64) response.Section {
	return normalised(1, -2*c.cos, 1, 1+alpha, -2*c.cos, 1-alpha)
}

// BandPass returns the cookbook's band-pass of 0 dB at f0, whose -3 dB width is
// f0/q in the limit of low f0.
func BandPass(rate, f0, q float64) (response.Section, error) {
	c, err := newCorner(rate, f0, quantity{"q", q})
	if err != nil {
		return response.Section{}, fmt.Errorf("bandpass: %w", err)
	}
	alpha := c.sin / (2 * q)
	return normalised(alpha, 0, -alpha, 1+alpha, -2*c.cos, 1-alpha), nil
}

// AllPass returns the cookbook's second-order all-pass: gain 1 everywhere, phase
// -180 degrees at f0, group delay 4 q/sin(w0) samples there.
func AllPass(rate, f0, q float64) (response.Section, error) {
	c, err := newCorner(rate, f0, quantity{"q", q})
	if err != nil {
		return response.Section{}, fmt.Errorf("allpass: %w", err)
	}
	alpha := c.sin / (2 * q)
	s := normalised(1-alpha, -2*c.cos, 1+alpha, 1+alpha, -2*c.cos, 1-alpha)
	return response.Section{B0: s.A2, B1: s.A1, B2: 1, A1: s.A1, A2: s.A2}, nil
}

// AllPassFirst returns the first-order all-pass (c + z^-1)/(1 + c z^-1) with
// -90 degrees at f0: c = (t-1)/(t+1), t = tan(pi f0/rate). Its group delay falls
// from (1-c)/(1+c) samples at 0 Hz (Oppenheim & Schafer, section on all-pass
// systems).
func AllPassFirst(rate, f0 float64) (response.Section, error) {
	if err := checkFrequency(f0, rate); err != nil {
		return response.Section{}, fmt.Errorf("allpass: %w", err)
	}
	t := prewarp(f0, rate)
	c := (t - 1) / (t + 1)
	return response.Section{B0: c, B1: 1, A1: c}, nil
}

// DC returns the first-order DC blocker
//
//	H = (1+r)/2 (1 - z^-1)/(1 - r z^-1),  r = (1-t)/(1+t),  t = tan(pi f/rate)
//
// which is the first-order Butterworth high-pass: exactly 0 at 0 Hz, -3.01 dB
// at f Hz, 1 at half the rate.
func DC(rate, f float64) (response.Section, error) {
	if err := checkFrequency(f, rate); err != nil {
		return response.Section{}, fmt.Errorf("dc: %w", err)
	}
	t := prewarp(f, rate)
	gain := 1 / (1 + t)
	return response.Section{B0: gain, B1: -gain, A1: -(1 - t) / (1 + t)}, nil
}
