package design

import (
	"fmt"
	"math"

	"fettle/filter/response"
)

// MatchedBell is Bell without the compression near half the rate: gainDB at f0,
// where the slope is 0, 0 dB at 0 Hz, and elsewhere close to the analogue bell
// of the same f0 and q, which is not back at 0 dB at half the rate. A bell of
// -gainDB is the exact inverse.
//
// Errors: as Bell; a shape whose poles float64 cannot hold inside the unit
// circle (a gain of 100 dB or more at a few hertz).
func MatchedBell(rate, f0, gainDB, q float64) (response.Section, error) {
	return matchedShape("matched bell", rate, f0, gainDB, q, analogueBell, biquadratic.matchedPeak)
}

// MatchedLowShelf is LowShelf without the compression near half the rate: it
// has the analogue shelf's magnitude at 0 Hz, at half the rate, and at f0 or a
// quarter of the rate, whichever is lower, and is close to it elsewhere. A shelf
// of -gainDB is the exact inverse. Errors: as MatchedBell's.
func MatchedLowShelf(rate, f0, gainDB, q float64) (response.Section, error) {
	return matchedShape("matched low shelf", rate, f0, gainDB, q, analogueLowShelf, biquadratic.matchedEnds)
}

// MatchedHighShelf is HighShelf without the compression near half the rate; see
// MatchedLowShelf. At half the rate it has the gain that the analogue shelf has
// there, which is not yet gainDB.
func MatchedHighShelf(rate, f0, gainDB, q float64) (response.Section, error) {
	return matchedShape("matched high shelf", rate, f0, gainDB, q, analogueHighShelf, biquadratic.matchedEnds)
}

// MatchedLowpass is the analogue low-pass 1/(s^2 + s/q + 1) with its magnitude
// kept as MatchedLowShelf keeps a shelf's; q = 1/sqrt(2) is a Butterworth of
// second order. Errors: as Notch; a shape that float64 cannot hold.
func MatchedLowpass(rate, f0, q float64) (response.Section, error) {
	return matchedPass("matched lowpass", rate, f0, q, [3]float64{0, 0, 1}, biquadratic.matchedEnds)
}

// MatchedHighpass is the analogue high-pass s^2/(s^2 + s/q + 1): a double zero
// at 0 Hz, and the analogue's magnitude q at f0. Errors: as Notch.
func MatchedHighpass(rate, f0, q float64) (response.Section, error) {
	return matchedPass("matched highpass", rate, f0, q, [3]float64{1, 0, 0}, biquadratic.matchedDouble)
}

// MatchedBandpass is the analogue band-pass (s/q)/(s^2 + s/q + 1): 0 at 0 Hz, 0
// dB at f0, where the slope is 0. Errors: as Notch; a shape that float64
// cannot hold.
func MatchedBandpass(rate, f0, q float64) (response.Section, error) {
	return matchedPass("matched bandpass", rate, f0, q, [3]float64{0, 1 / q, 0}, biquadratic.matchedPeak)
}

// matching turns a prototype into a section at w0 = 2 pi f0/rate.
type matching func(b biquadratic, w0 float64) (response.Section, bool)

// matchedShape designs for the boost whichever of the prototype and its inverse
// has its poles nearer 0 Hz, and inverts the section if that is not the one
// asked for. A cut is the inverse of the boost, so both use the same section.
func matchedShape(name string, rate, f0, gainDB, q float64, prototype func(a, q float64) biquadratic, match matching) (response.Section, error) {
	if err := checkGain(gainDB); err != nil {
		return response.Section{}, fmt.Errorf("%s: %w", name, err)
	}
	b := prototype(fromDB(math.Abs(gainDB)/2), q)
	inverted := b.polesFarther()
	if inverted {
		b = b.inverse()
	}
	s, err := matched(name, rate, f0, q, b, match)
	if err != nil {
		return response.Section{}, err
	}
	if inverted != (gainDB < 0) {
		s = normalised(1, s.A1, s.A2, s.B0, s.B1, s.B2)
	}
	return s, nil
}

// polesFarther tells whether the poles lie farther from 0 Hz than the zeros, or
// as far and are damped more. Both polynomials are compared with s^2 made 1.
func (b biquadratic) polesFarther() bool {
	poles, zeros := b.den[2]*b.num[0], b.num[2]*b.den[0]
	if poles == zeros {
		poles, zeros = b.den[1]*b.num[0], b.num[1]*b.den[0]
	}
	return poles > zeros
}

func matchedPass(name string, rate, f0, q float64, num [3]float64, match matching) (response.Section, error) {
	return matched(name, rate, f0, q, biquadratic{num, [3]float64{1, 1 / q, 1}}, match)
}

func matched(name string, rate, f0, q float64, b biquadratic, match matching) (response.Section, error) {
	if err := checkFrequency(f0, rate); err != nil {
		return response.Section{}, fmt.Errorf("%s: %w", name, err)
	}
	if err := (quantity{"q", q}).check(); err != nil {
		return response.Section{}, fmt.Errorf("%s: %w", name, err)
	}
	s, ok := match(b, 2*math.Pi*f0/rate)
	if !ok || !response.Stable([]response.Section{s}) {
		return response.Section{}, fmt.Errorf("%s: %g Hz with a q of %g at a rate of %g Hz has its poles too near the unit circle; lower the gain or q, or raise the frequency", name, f0, q, rate)
	}
	return s, nil
}
