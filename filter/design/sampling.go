package design

import (
	"fmt"
	"math"
	"math/bits"

	"gonum.org/v1/gonum/dsp/fourier"
)

// Sampling asks for a kernel that follows a curve of any shape.
type Sampling struct {
	Taps          int
	Antisymmetric bool
	Rate          float64
	// Hz and Gain are the curve's corners, straight between: ascending from 0
	// to half the rate. A frequency given twice is a step. Gains are linear.
	Hz, Gain []float64
	// Points is the number of steps in which the curve is sampled from 0 Hz to
	// half the rate, a power of two not under Taps/2; 0 means the least that is
	// at least 16 times Taps.
	Points int
}

// FrequencySampling samples the curve at evenly spaced frequencies, transforms
// and cuts to the wanted length under a window of Taps points (see Window;
// nil means rectangular). The response has the phase described at BandSpec;
// the delay is (Taps-1)/2. Each corner of the curve is rounded over about the
// width of the window's main lobe. A sample on a step takes the mean.
//
// Errors: a curve out of order, with other ends than 0 and half the rate, or
// with gains that are no numbers; a gain where the type has a forced zero; a
// window of another length.
//
// Source: Rabiner & Gold, Theory and Application of Digital Signal Processing
// (1975), chapter 3 (frequency sampling); Mitra, Digital Signal Processing,
// chapter 10.
func FrequencySampling(s Sampling, window []float64) ([]float64, error) {
	if err := s.check(window); err != nil {
		return nil, fmt.Errorf("frequency sampling, %d taps: %w", s.Taps, err)
	}
	points := s.points()
	spectrum := make([]complex128, points+1)
	late := math.Pi * float64(s.Taps-1) / 2
	for k := range spectrum {
		part := float64(k) / float64(points)
		sin, cos := math.Sincos(-late * part)
		gain := s.gainAt(part * s.Rate / 2)
		if s.Antisymmetric {
			sin, cos = cos, -sin
		}
		spectrum[k] = complex(gain*cos, gain*sin)
	}
	taps := fourier.NewFFT(2*points).Sequence(nil, spectrum)[:s.Taps]
	for i := range taps {
		taps[i] /= float64(2 * points)
		if window != nil {
			taps[i] *= window[i]
		}
	}
	return mirrored(taps, s.Antisymmetric), nil
}

func (s Sampling) points() int {
	if s.Points != 0 {
		return s.Points
	}
	return 1 << bits.Len(uint(16*s.Taps-1))
}

func (s Sampling) check(window []float64) error {
	last := len(s.Hz) - 1
	switch {
	case s.Taps < 1 || s.Taps > MaxTaps:
		return fmt.Errorf("the number of taps must lie between 1 and %d", MaxTaps)
	case !(s.Rate > 0) || math.IsInf(s.Rate, 1):
		return fmt.Errorf("a rate of %g Hz is not a sample rate; it must be above 0 Hz", s.Rate)
	case len(s.Hz) != len(s.Gain):
		return fmt.Errorf("%d frequencies and %d gains; give a gain for each frequency", len(s.Hz), len(s.Gain))
	case last < 1:
		return fmt.Errorf("a curve needs at least two corners, at 0 Hz and at half the sample rate (%g Hz)", s.Rate/2)
	case s.Hz[0] != 0 || s.Hz[last] != s.Rate/2:
		return fmt.Errorf("the curve runs from %g to %g Hz; it must begin at 0 Hz and end at half the sample rate (%g Hz)", s.Hz[0], s.Hz[last], s.Rate/2)
	case s.Points != 0 && (bits.OnesCount(uint(s.Points)) != 1 || 2*s.Points < s.Taps):
		return fmt.Errorf("%d points is not a power of two of at least half the taps", s.Points)
	case window != nil && len(window) != s.Taps:
		return fmt.Errorf("a window of %d points does not fit", len(window))
	}
	if err := s.checkCurve(); err != nil {
		return err
	}
	return checkForced("curve with a gain there", s.Taps, s.Antisymmetric, s.Gain[0] != 0, s.Gain[last] != 0)
}

func (s Sampling) checkCurve() error {
	for i, hz := range s.Hz {
		if i > 0 && !(hz >= s.Hz[i-1]) {
			return fmt.Errorf("%g Hz follows %g Hz; put the curve's frequencies in ascending order", hz, s.Hz[i-1])
		}
		if i > 1 && hz == s.Hz[i-2] {
			return fmt.Errorf("%g Hz is given three times; a step needs it twice", hz)
		}
		if g := s.Gain[i]; math.IsNaN(g) || math.IsInf(g, 0) {
			return fmt.Errorf("the gain at %g Hz is %g; give a finite factor, not dB", hz, g)
		}
	}
	return nil
}

// gainAt reads the curve; hz is 0..rate/2.
func (s Sampling) gainAt(hz float64) float64 {
	i := len(s.Hz) - 1
	for s.Hz[i] > hz {
		i--
	}
	if s.Hz[i] == hz {
		if i > 0 && s.Hz[i-1] == hz {
			return (s.Gain[i-1] + s.Gain[i]) / 2
		}
		return s.Gain[i]
	}
	part := (hz - s.Hz[i]) / (s.Hz[i+1] - s.Hz[i])
	return s.Gain[i] + part*(s.Gain[i+1]-s.Gain[i])
}
