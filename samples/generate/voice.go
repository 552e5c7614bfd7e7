package main

import "math"

// A resonator is a two-pole digital resonator with gain 1 at 0 Hz: y[n] =
// A·x[n] + B·y[n-1] + C·y[n-2], C = -exp(-2π·bw/fs), B = 2·exp(-π·bw/fs)·
// cos(2π·hz/fs), A = 1-B-C. D. H. Klatt, Software for a cascade/parallel formant
// synthesizer, J. Acoust. Soc. Am. 67 (1980), section II.A.
type resonator struct{ y1, y2 float64 }

func (r *resonator) step(x, hz, bw float64, rate int) float64 {
	t := math.Pi / float64(rate)
	c := -math.Exp(-2 * t * bw)
	b := 2 * math.Exp(-t*bw) * math.Cos(2*t*hz)
	y := (1-b-c)*x + b*r.y1 + c*r.y2
	r.y1, r.y2 = y, r.y1
	return y
}

// formants are the resonances of a vocal tract in Hz.
type formants [4]float64

// bandwidths go with the formants, in Hz.
var bandwidths = formants{70, 100, 160, 250}

// vowels are first to third formants of men's voices after G. E. Peterson and
// H. L. Barney, Control methods used in a study of the vowels, J. Acoust. Soc.
// Am. 24 (1952), table II (figures from memory); the fourth is common practice.
var vowels = map[byte]formants{
	'i': {270, 2290, 3010, 3500},
	'e': {530, 1840, 2480, 3500},
	'a': {730, 1090, 2440, 3500},
	'o': {570, 840, 2410, 3500},
	'u': {300, 870, 2240, 3500},
}

// toward returns the formants a part 0..1 of the way from f to g.
func (f formants) toward(g formants, part float64) formants {
	for i := range f {
		f[i] += part * (g[i] - f[i])
	}
	return f
}

// A tract is the chain of resonators between glottis and lips.
type tract [4]resonator

func (t *tract) step(x float64, f formants, rate int) float64 {
	for i := range t {
		x = t[i].step(x, f[i], bandwidths[i], rate)
	}
	return x
}

// A glottis makes the train of pulses that drives the tract.
type glottis struct{ phase, flow float64 }

// step advances by one sample at the given pitch and returns the change in
// flow: radiation at the lips acts as a differentiator.
func (g *glottis) step(pitch float64, rate int) float64 {
	_, g.phase = math.Modf(g.phase + pitch/float64(rate))
	last := g.flow
	g.flow = pulse(g.phase)
	return g.flow - last
}

// pulse is the glottal flow at a phase 0..1 of the period: it opens for 0.4 and
// closes within 0.16. A. E. Rosenberg, Effect of glottal pulse shape on the
// quality of natural vowels, J. Acoust. Soc. Am. 49 (1971), trigonometric shape.
func pulse(phase float64) float64 {
	const opens, closes = 0.4, 0.16
	switch {
	case phase < opens:
		return 0.5 - 0.5*math.Cos(math.Pi*phase/opens)
	case phase < opens+closes:
		return math.Cos(math.Pi / 2 * (phase - opens) / closes)
	}
	return 0
}
