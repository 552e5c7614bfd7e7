package main

import (
	"math"
	"math/rand/v2"
)

// mains is the frequency of the shore supply in Hz.
const mains = 50.0

// humLines are the levels of the supply's harmonics in dB relative to the line
// at 50 Hz. A smoothing stage after a full-wave rectifier leaves even ones, a
// saturated transformer odd ones; both fall with frequency.
var humLines = [...]float64{0, -4, -7, -14, -12, -20, -18, -26}

// hum renders the lines of the supply, that of 50 Hz with an RMS value of 1.
func hum(frames, rate int) []float64 {
	x := make([]float64, frames)
	for k, level := range humLines {
		a := math.Sqrt2 * amplitude(level)
		// Phases a radian apart keep the crests of the lines from adding up.
		w, phase := 2*math.Pi*mains*float64(k+1)/float64(rate), float64(k)
		for n := range x {
			x[n] += a * math.Sin(w*float64(n)+phase)
		}
	}
	return x
}

// rumble renders a slow diesel under the deck, RMS 1: four lines on its firing
// rate, which hunts, and noise of the hull below about 30 Hz. No line comes
// within 4 Hz of the supply's, so the two faults can be told apart.
func rumble(frames, rate int, r *rand.Rand) []float64 {
	x := toUnitRMS(hull(frames, rate, r))
	scale(x, 0.4)
	const firing = 11.3 // Hz
	for k, a := range [...]float64{0.5, 1, 0.6, 0.3} {
		for n := range x {
			t := float64(n) / float64(rate)
			// The governor swings the rate by 0.5 % about twice in 5 s.
			cycles := firing * (t + 0.005*math.Sin(2*math.Pi*0.4*t)/(2*math.Pi*0.4))
			x[n] += a * math.Sin(2*math.Pi*float64(k+1)*cycles+1.7*float64(k))
		}
	}
	return toUnitRMS(x)
}

// hull is noise between a first-order slope at 6 Hz, so that it adds no offset
// of its own, and a third-order slope at 25 Hz.
func hull(frames, rate int, r *rand.Rand) []float64 {
	x := white(frames, r)
	for range 3 {
		smooth(x, 25, rate)
	}
	return couple(x, 6, rate)
}

// hiss renders tape noise, RMS 1: white, with more of it at the top where
// replay equalisation lifts what the head loses.
func hiss(frames int, r *rand.Rand) []float64 {
	x := white(frames, r)
	last := 0.0
	for n, v := range x {
		x[n], last = v-0.4*last, v
	}
	return toUnitRMS(x)
}

// water renders the wash along the hull, RMS 1: noise that swells every three
// seconds and falls so fast with frequency that hiss is heard above it.
func water(frames, rate int, r *rand.Rand) []float64 {
	x := white(frames, r)
	smooth(x, 700, rate)
	smooth(x, 700, rate)
	couple(x, 180, rate)
	for n := range x {
		x[n] *= 1 + 0.4*math.Sin(2*math.Pi*float64(n)/(3*float64(rate)))
	}
	return toUnitRMS(x)
}

// white returns independent values with a triangular density between -1 and 1.
// Its mean is 0 and its variance 1/6.
func white(frames int, r *rand.Rand) []float64 {
	x := make([]float64, frames)
	for n := range x {
		x[n] = triangular(r)
	}
	return x
}

func triangular(r *rand.Rand) float64 { return r.Float64() - r.Float64() }

// smooth is a one-pole low-pass at hz, in place.
func smooth(x []float64, hz float64, rate int) []float64 {
	a := 1 - math.Exp(-2*math.Pi*hz/float64(rate))
	var y float64
	for n, v := range x {
		y += a * (v - y)
		x[n] = y
	}
	return x
}

// couple is what a coupling capacitor does: a one-pole high-pass at hz, in place.
func couple(x []float64, hz float64, rate int) []float64 {
	low := smooth(append([]float64(nil), x...), hz, rate)
	for n := range x {
		x[n] -= low[n]
	}
	return x
}
