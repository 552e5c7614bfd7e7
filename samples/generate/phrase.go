package main

import (
	"math"
	"math/rand/v2"
	"strings"
)

// A phrase is speech-like sound: syllables of one consonant and one vowel. They
// mean nothing; they have the pitch, the formants, the closures and the bursts
// that a filter can smear.
type phrase struct {
	at    int     // frame of the first burst: a phrase begins with p, t or k
	pitch float64 // Hz, in the middle of the phrase
	level float64 // peak, relative to the loudest sound of the scene
	text  string
}

// Durations in seconds.
const (
	syllable = 0.19
	closure  = 0.05 // silence before a plosive inside a phrase
	glide    = 0.05 // from one vowel to the next
	release  = 0.10 // ring of the tract after the last vowel
)

// A consonant is described by how far the voice falls for it and by its noise.
type consonant struct {
	voice   float64 // 0..1, what is left of the voice
	plosive bool
	noise   float64 // peak of the noise; 0 for none
	hz, bw  float64 // where the noise lies
	decay   float64 // s
}

var consonants = map[byte]consonant{
	'p': {plosive: true, noise: 1, hz: 900, bw: 1200, decay: 0.004},
	't': {plosive: true, noise: 1, hz: 3600, bw: 1800, decay: 0.006},
	'k': {plosive: true, noise: 1, hz: 1900, bw: 900, decay: 0.009},
	's': {noise: 0.25, hz: 5200, bw: 1500, decay: 0.03},
	'm': {voice: 0.35}, 'n': {voice: 0.4}, 'l': {voice: 0.55}, 'r': {voice: 0.5},
}

// sound renders the phrase from its first burst on.
func (p phrase) sound(rate int, r *rand.Rand) []float64 {
	syllables := strings.Fields(p.text)
	x := make([]float64, int(float64(rate)*(float64(len(syllables))*syllable+release)))
	p.voiced(x, syllables, rate)
	toPeak(x, 1)
	for i, s := range syllables {
		at := float64(i) * syllable
		c := consonants[s[0]]
		if c.plosive && i > 0 {
			at += closure
		}
		if c.noise > 0 {
			mix(x, c.sound(rate, r), int(at*float64(rate)), c.noise*0.5)
		}
	}
	return x
}

// voiced fills x with the pulses of the glottis through the moving tract.
func (p phrase) voiced(x []float64, syllables []string, rate int) {
	var g glottis
	var t tract
	length := float64(len(x)) / float64(rate)
	for n := range x {
		at := float64(n) / float64(rate)
		// Pitch sinks by a fifth of itself over a phrase, with a little tremor.
		pitch := p.pitch * (1.1 - 0.2*at/length + 0.015*math.Sin(2*math.Pi*4.7*at))
		open, f := articulation(syllables, at)
		x[n] = t.step(open*g.step(pitch, rate), f, rate)
	}
}

// articulation returns the strength of the voice and the formants at a time.
func articulation(syllables []string, at float64) (open float64, f formants) {
	i := int(at / syllable)
	if i >= len(syllables) {
		return 0, vowels[syllables[len(syllables)-1][1]]
	}
	in := at - float64(i)*syllable
	this, next := consonants[syllables[i][0]], consonant{}
	if i+1 < len(syllables) {
		next = consonants[syllables[i+1][0]]
	}
	start := 0.012 // the voice follows a burst by about this much
	if this.plosive && i > 0 {
		start += closure
	}
	attack := ramp((in - start) / 0.03)
	fall := ramp((syllable - in) / 0.04)
	open = (this.voice + (1-this.voice)*attack) * (next.voice + (1-next.voice)*fall)
	f = vowels[syllables[i][1]]
	if i > 0 {
		f = vowels[syllables[i-1][1]].toward(f, ramp(in/glide))
	}
	return open, f
}

// sound renders the noise of a consonant, peak 1. A plosive starts with the
// step of the pressure let go, so its first frame is its onset; others swell.
func (c consonant) sound(rate int, r *rand.Rand) []float64 {
	var body resonator
	x := make([]float64, int(c.decay*7*float64(rate)))
	for n := range x {
		t := float64(n) / float64(rate) / c.decay
		swell := math.Exp(-t)
		if !c.plosive {
			swell *= t
		}
		x[n] = swell * body.step(triangular(r), c.hz, c.bw, rate)
	}
	toPeak(x, 1)
	if c.plosive {
		x[0] = 0.8
	}
	return x
}

// ramp rises from 0 to 1 along half a cosine while part goes from 0 to 1.
func ramp(part float64) float64 {
	return 0.5 - 0.5*math.Cos(math.Pi*min(max(part, 0), 1))
}
