package probe

import "math"

// Once is one repeat without dither, as it is seen by a clock that takes stretch
// samples to one of the probe's: 1 for the probe itself. The chirp is computed from
// its formula, so that a drifting capture needs no interpolation.
func (p Parameters) Once(stretch float64) []float64 {
	if p.Kind == Impulse {
		return []float64{p.Amplitude()}
	}
	c := p.curve()
	x := make([]float64, int(math.Ceil(float64(p.Signal)*stretch)))
	for n := range x {
		x[n] = c.at(float64(n) / stretch)
	}
	return x
}

// curve is a chirp as a function of samples since its start.
type curve struct {
	amplitude float64
	growth    float64 // samples by a factor of e
	cycles    float64 // at the start, in so many samples
	in, out   float64 // lengths of the tapers
	length    float64
}

func (p Parameters) curve() curve {
	l := p.growth()
	return curve{
		amplitude: p.Amplitude(), growth: l, cycles: p.start() * l / float64(p.Rate),
		in: l * math.Log(p.From/p.start()), out: l * math.Log(p.end()/p.To), length: float64(p.Signal),
	}
}

func (c curve) at(t float64) float64 {
	fade := taper(t/c.in) * taper((c.length-t)/c.out)
	return c.amplitude * fade * math.Sin(2*math.Pi*c.cycles*math.Expm1(t/c.growth))
}

// taper rises from 0 to 1 over 0..1 as a squared sine.
func taper(x float64) float64 {
	if x >= 1 {
		return 1
	}
	s := math.Sin(math.Pi / 2 * math.Max(0, x))
	return s * s
}

// Unmeasured is how little the probe says about a frequency in Hz: 0 where it
// stands at full level, 1 where its tapers leave less than a tenth of that, and
// smooth between.
func (p Parameters) Unmeasured(hz float64) float64 {
	if p.Kind == Impulse {
		return 0
	}
	low := faintShare(hz, p.start(), p.From)
	high := faintShare(1/hz, 1/p.end(), 1/p.To)
	return math.Max(low, high)
}

// faintShare runs from 1, where a taper that begins at from has reached a tenth of
// its height, to 0, where it ends at to. The taper is even over the logarithm of
// frequency.
func faintShare(hz, from, to float64) float64 {
	const tenth = 0.205 // taper(0.205) is 0.1
	along := math.Log(hz/from) / math.Log(to/from)
	return 1 - taper((along-tenth)/(1-tenth))
}
