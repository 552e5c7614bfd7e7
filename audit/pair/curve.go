package pair

import (
	"math"
	"math/cmplx"
	"slices"
)

const (
	curveFrom      = 10.0 // Hz
	curvePerOctave = 24
)

// fillCurve reads the transfer function off at even steps of the octave.
func (r *Result) fillCurve(s *spectra, v *view, c *comparison) {
	hz := float64(c.rate) / float64(2*s.size())
	whole := math.Round(v.delay)
	for i := 0; ; i++ {
		f := curveFrom * math.Exp2(float64(i)/curvePerOctave)
		if f >= float64(c.rate)/2 {
			return
		}
		k, half := int(math.Round(f/hz)), int(f/hz/(2*curvePerOctave))+1
		g := s.coherence(k-half, k+half+1)
		magnitude, phase, delay := math.NaN(), math.NaN(), math.NaN()
		if g >= coherent {
			h, d := v.at.At(f)
			magnitude = 20 * math.Log10(cmplx.Abs(h))
			phase = cmplx.Phase(h*cmplx.Rect(1, 2*math.Pi*f/float64(c.rate)*whole)) * 180 / math.Pi
			delay = (d + float64(c.lag)) / float64(c.rate)
		}
		q := &r.Curve
		q.Hz, q.Magnitude, q.Phase = append(q.Hz, f), append(q.Magnitude, magnitude), append(q.Phase, phase)
		q.GroupDelay, q.Coherence = append(q.GroupDelay, delay), append(q.Coherence, g)
	}
}

// medianOf is the median of what is above 0; 0 when nothing is.
func medianOf(x []float64) float64 {
	var y []float64
	for _, v := range x {
		if v > 0 {
			y = append(y, v)
		}
	}
	if len(y) == 0 {
		return 0
	}
	slices.Sort(y)
	return y[len(y)/2]
}
