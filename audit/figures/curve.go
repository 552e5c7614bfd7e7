package figures

import (
	"math"
	"math/cmplx"
)

// Curve is the response over frequency: from 10 Hz in steps of 1/24 octave, and
// at half the sample rate. Phase and group delay are NaN where the magnitude is
// more than 60 dB under its maximum.
type Curve struct {
	Hz         []float64
	Magnitude  []float64 // dB re 1
	Phase      []float64 // degrees relative to the aligned instant, -180 to 180
	GroupDelay []float64 // s, with what was removed for alignment
}

const (
	curveFrom      = 10.0
	curvePerOctave = 24
)

func curveFrequencies(rate float64) []float64 {
	var hz []float64
	for i := 0; ; i++ {
		f := curveFrom * math.Exp2(float64(i)/curvePerOctave)
		if f >= rate/2 {
			return append(hz, rate/2)
		}
		hz = append(hz, f)
	}
}

// curve evaluates the response at each frequency directly; origin is the aligned
// instant as an index of s.x, removed the samples taken out before.
func (s *spectrum) curve(origin, removed float64) Curve {
	c := Curve{Hz: curveFrequencies(s.rate)}
	for _, f := range c.Hz {
		h, nh := transformAt(s.x, s.mid, f, s.rate)
		phase, delay := math.NaN(), math.NaN()
		if hh := power(h); hh >= stated*s.peak {
			phase = cmplx.Phase(h*turn(2*math.Pi*f*origin/s.rate)) * 180 / math.Pi
			delay = (inPhase(nh, h)/hh + s.mid - origin + removed) / s.rate
		}
		c.Magnitude = append(c.Magnitude, decibels(power(h)))
		c.Phase = append(c.Phase, phase)
		c.GroupDelay = append(c.GroupDelay, delay)
	}
	return c
}
