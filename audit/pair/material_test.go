package pair

import (
	"math"
	"math/cmplx"
	"math/rand/v2"

	"fettle/audio"
	"fettle/filter/response"
	"fettle/filter/stream"
	"fettle/filter/stream/machine"

	goaudio "github.com/go-audio/audio"
)

// speechLike is a voice that no one has: pulses whose rate wanders, through resonances that
// wander, in syllables with pauses, and hiss between them.
func speechLike(rate, frames int, seed uint64) []float64 {
	r := rand.New(rand.NewPCG(seed, 1))
	x := make([]float64, frames)
	fs := float64(rate)
	phase, pitch, level, target, hiss := 0.0, 120.0, 0.0, 0.0, 0.0
	var y [3][2]float64
	centres := [3]float64{600, 1400, 2600}
	goal := centres
	for n := range x {
		if n%(rate/6) == 0 { // a syllable
			target, hiss = 0, 0
			switch u := r.Float64(); {
			case u < 0.6:
				target = 0.3 + 0.7*r.Float64()
			case u < 0.8:
				hiss = 0.3
			}
			for i := range goal {
				goal[i] = []float64{300, 900, 2000}[i] * (1 + r.Float64())
			}
		}
		pitch += (90 + 60*math.Sin(float64(n)/fs*3) - pitch) * 10 / fs
		pitch += r.NormFloat64() * 0.02
		level += (target - level) * 60 / fs
		phase += pitch / fs
		pulse := 0.0
		if phase >= 1 {
			phase--
			pulse = 8
		}
		in := level*pulse + (0.05*level+hiss)*r.NormFloat64()
		out := 0.0
		for i := range centres {
			centres[i] += (goal[i] - centres[i]) * 20 / fs
			bw := 80.0 + 40*float64(i)
			p := math.Exp(-math.Pi * bw / fs)
			a1, a2 := -2*p*math.Cos(2*math.Pi*centres[i]/fs), p*p
			v := in*(1-p) - a1*y[i][0] - a2*y[i][1]
			y[i][1], y[i][0] = y[i][0], v
			out += v
		}
		x[n] = 0.1*out + 0.02*in + 3e-4*r.NormFloat64()
	}
	return x
}

// musicLike is plucked notes of many harmonics and a drum of noise.
func musicLike(rate, frames int, seed uint64) []float64 {
	r := rand.New(rand.NewPCG(seed, 2))
	x := make([]float64, frames)
	fs := float64(rate)
	for at := 0; at < frames; at += rate / 8 {
		f := 55 * math.Exp2(float64(r.IntN(48))/12)
		length := min(rate, frames-at)
		for h := 1; float64(h)*f < 0.45*fs && h < 40; h++ {
			a := 0.1 / float64(h) * (0.5 + r.Float64())
			ph := 2 * math.Pi * r.Float64()
			w := 2 * math.Pi * f * float64(h) * (1 + 1e-4*float64(h*h)) / fs
			z, turn := cmplx.Rect(a, ph), cmplx.Rect(math.Exp(-(2+float64(h))/fs), w)
			for n := range length {
				x[at+n] += imag(z)
				z *= turn
			}
		}
		if r.IntN(2) == 0 {
			for n := range min(rate/5, frames-at) {
				x[at+n] += 0.2 * math.Exp(-30*float64(n)/fs) * r.NormFloat64()
			}
		}
	}
	return x
}

// through is x through sections, delayed by whole samples, with noise.
func through(x []float64, sections []response.Section, delay int, gain, noise float64, seed uint64) []float64 {
	y := make([]float64, len(x))
	for n := range y {
		if n >= delay {
			y[n] = gain * x[n-delay]
		}
	}
	if sections != nil {
		stream.NewCascade(sections, 1, machine.Best()).Process([][]float64{y}, [][]float64{y})
	}
	r := rand.New(rand.NewPCG(seed, 3))
	for n := range y {
		y[n] += noise * r.NormFloat64()
	}
	return y
}

// of opens samples in memory.
func of(rate int, planes ...[]float64) Opener {
	x := make([]float64, len(planes)*len(planes[0]))
	for c, p := range planes {
		for n, v := range p {
			x[n*len(planes)+c] = v
		}
	}
	return func() (audio.Source, error) {
		return audio.FromFrames(&goaudio.Format{SampleRate: rate, NumChannels: len(planes)}, x), nil
	}
}

// secondOrder are RBJ's low-pass and high-pass with Q = 1/√2.
func lowpass(f, rate float64) response.Section {
	k := math.Tan(math.Pi * f / rate)
	n := 1 / (1 + k*math.Sqrt2 + k*k)
	return response.Section{B0: k * k * n, B1: 2 * k * k * n, B2: k * k * n, A1: 2 * (k*k - 1) * n, A2: (1 - k*math.Sqrt2 + k*k) * n}
}

func highpass(f, rate float64) response.Section {
	k := math.Tan(math.Pi * f / rate)
	n := 1 / (1 + k*math.Sqrt2 + k*k)
	return response.Section{B0: n, B1: -2 * n, B2: n, A1: 2 * (k*k - 1) * n, A2: (1 - k*math.Sqrt2 + k*k) * n}
}
