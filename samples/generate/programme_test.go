package main

import (
	"math"
	"math/big"
	"slices"
	"strings"
	"testing"
)

// bend returns the magnitude of the second difference of x at frame n, which
// hardly hears rumble and hum and jumps at an onset.
func bend(x []float64, n int) float64 { return math.Abs(x[n] - 2*x[n-1] + x[n-2]) }

// Every onset of the table is where it says, to the frame and on each channel:
// there the second difference first reaches three times the most of the 12 ms
// or more before, and the energy around it rises by 10 dB.
func TestOnsets(t *testing.T) {
	eachChannel(t, every, func(t *testing.T, s scene, ch channel, x []float64) {
		for _, o := range s.onsets() {
			at := o.frame + ch.lag
			var before float64
			for n := at - 600; n < at-60; n++ {
				before = max(before, bend(x, n))
			}
			found := -1
			for n := at - 60; n < at+60 && found < 0; n++ {
				if bend(x, n) >= 3*before {
					found = n
				}
			}
			if found != at {
				t.Errorf("%s stated at frame %d, found at %d", o.what, at, found)
			}
			rise := dB(roughness(x[at:at+64]) / roughness(x[at-64:at]))
			t.Logf("%s at frame %d: found at %d, energy rises by %.1f dB (wanted 10)", o.what, at, found, rise)
			if !(rise >= 10) {
				t.Errorf("%s at frame %d: energy rises by %.1f dB, want 10", o.what, at, rise)
			}
		}
	})
}

// roughness is the mean square of the second difference of x.
func roughness(x []float64) float64 {
	var sum float64
	for n := 2; n < len(x); n++ {
		sum += bend(x, n) * bend(x, n)
	}
	return sum / float64(len(x)-2)
}

// In the first vowel of each phrase, 60 to 160 ms after its burst, the voice
// repeats itself at the pitch that the scene states. Pitch glides by 1.5 % there
// and the tremor adds as much: 4 % in all, with a lag of one frame in 130.
func TestPitch(t *testing.T) {
	eachChannel(t, withSpeech, func(t *testing.T, s scene, ch channel, x []float64) {
		for _, p := range s.phrases {
			vowel := slices.Clone(x[p.at+s.rate*60/1000 : p.at+s.rate*160/1000])
			want := p.pitch * 1.085 // a thirteenth of the phrase down from 1.1
			within(t, "pitch over stated pitch", pitch(couple(vowel, 70, s.rate), s.rate)/want, 1, 0.04)
		}
	})
}

// pitch returns the frequency, 70 to 220 Hz, whose period x repeats best: the
// lag of the greatest normalised autocorrelation.
func pitch(x []float64, rate int) float64 {
	best, most := 0, 0.0
	for lag := rate / 220; lag <= rate/70; lag++ {
		var cross, a, b float64
		for n := lag; n < len(x); n++ {
			cross += x[n] * x[n-lag]
			a += x[n] * x[n]
			b += x[n-lag] * x[n-lag]
		}
		if r := cross / math.Sqrt(a*b); r > most {
			best, most = lag, r
		}
	}
	return float64(rate) / float64(best)
}

// The bell has the partials of a minor-third bell at 0.5, 1, 1.2, 1.5 and 2
// times its prime of 1180 Hz (Fletcher and Rossing, The Physics of Musical
// Instruments, chapter on bells; ratios from memory): each stands 20 dB over the
// geometric mean between it and its neighbour.
func TestBellPartials(t *testing.T) {
	const prime = 1180.0
	ratios := []float64{0.5, 1, 1.2, 1.5, 2, 3}
	for _, s := range scenes {
		if s.strikes[0].kind != "bell" {
			continue
		}
		at := s.strikes[0].at + 2000 // after the contact
		x := decode(t, s).channels[0][at : at+24000]
		for i, r := range ratios[:5] {
			between := math.Sqrt(r * ratios[i+1])
			over := dB(line(x, r*prime, s.rate) / line(x, between*prime, s.rate))
			t.Logf("partial %.1f: %.1f dB over its surroundings (wanted 20)", r, over)
			if !(over >= 20) {
				t.Errorf("partial %.1f stands %.1f dB over its surroundings, want 20", r, over)
			}
		}
	}
}

// The scenes keep what is said of them: onsets at prime frames, phrases that
// begin with a plosive, and only letters that have a sound.
func TestScenesAreSound(t *testing.T) {
	for _, s := range scenes {
		for _, o := range s.onsets() {
			if !big.NewInt(int64(o.frame)).ProbablyPrime(0) {
				t.Errorf("%s: %s at frame %d, which is no prime", s.path, o.what, o.frame)
			}
		}
		for _, p := range s.phrases {
			if !consonants[p.text[0]].plosive {
				t.Errorf("%s: phrase %q does not begin with a plosive", s.path, p.text)
			}
			for _, syllable := range strings.Fields(p.text) {
				_, first := consonants[syllable[0]]
				_, second := vowels[syllable[1]]
				if !first || !second || len(syllable) != 2 {
					t.Errorf("%s: syllable %q is not a known consonant and vowel", s.path, syllable)
				}
			}
		}
	}
}
