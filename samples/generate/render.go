package main

import (
	"fmt"
	"hash/fnv"
	"math"
	"math/rand/v2"
)

// random returns the number sequence of one purpose in this scene.
func (s scene) random(purpose string) *rand.Rand {
	h := fnv.New64a()
	h.Write([]byte(s.path + "\x00" + purpose))
	return rand.New(rand.NewPCG(h.Sum64(), 1))
}

// render returns one signal a channel, full scale 1.0.
func (s scene) render() [][]float64 {
	programme := s.programme()
	out := make([][]float64, len(s.channels))
	for c, ch := range s.channels {
		out[c] = s.background(c)
		mix(out[c], programme, ch.lag, ch.gain)
	}
	return out
}

// programme renders what the nearest microphone is meant to pick up.
func (s scene) programme() []float64 {
	x := make([]float64, s.frames)
	for i, k := range s.strikes {
		sound := k.sound(s.rate, s.random(fmt.Sprint("strike ", i)))
		mix(x, toPeak(sound, k.level), k.at, 1)
	}
	for i, p := range s.phrases {
		sound := p.sound(s.rate, s.random(fmt.Sprint("phrase ", i)))
		mix(x, toPeak(sound, p.level), p.at, 1)
	}
	return toPeak(x, amplitude(s.peak))
}

// background renders the faults of one channel. Engine and supply are the same
// for all channels of a scene; hiss and water are not.
func (s scene) background(c int) []float64 {
	ch := s.channels[c]
	x := make([]float64, s.frames)
	for n := range x {
		x[n] = ch.dc
	}
	layer := func(level float64, unit func() []float64) {
		if level < 0 {
			mix(x, unit(), 0, amplitude(level))
		}
	}
	layer(ch.rumble, func() []float64 { return rumble(s.frames, s.rate, s.random("rumble")) })
	layer(ch.hum, func() []float64 { return hum(s.frames, s.rate) })
	layer(ch.hiss, func() []float64 { return hiss(s.frames, s.random(fmt.Sprint("hiss ", c))) })
	layer(ch.water, func() []float64 { return water(s.frames, s.rate, s.random(fmt.Sprint("water ", c))) })
	return x
}

// mix adds gain·src to dst from frame at on; what reaches past the end is lost.
func mix(dst, src []float64, at int, gain float64) {
	for n, v := range src[:min(len(src), len(dst)-at)] {
		dst[at+n] += gain * v
	}
}

// toPeak scales x in place to the given greatest magnitude.
func toPeak(x []float64, peak float64) []float64 {
	var most float64
	for _, v := range x {
		most = max(most, math.Abs(v))
	}
	return scale(x, peak/most)
}

// toUnitRMS scales x in place to an RMS value of 1.
func toUnitRMS(x []float64) []float64 {
	var sum float64
	for _, v := range x {
		sum += v * v
	}
	return scale(x, 1/math.Sqrt(sum/float64(len(x))))
}

func scale(x []float64, by float64) []float64 {
	for n := range x {
		x[n] *= by
	}
	return x
}

func amplitude(db float64) float64 { return math.Pow(10, db/20) }
