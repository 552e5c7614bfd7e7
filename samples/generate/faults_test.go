package main

import (
	"math"
	"testing"
)

// A rumble line of RMS a at f Hz adds at most √2·a/(π·f·T) to the mean over T
// seconds: 2.1e-4 for the worst, -36 dBFS at 11.3 Hz over 3 s. The other lines
// and the hull's noise have less room below them.
func TestOffset(t *testing.T) {
	eachChannel(t, every, func(t *testing.T, s scene, ch channel, x []float64) {
		within(t, "offset", mean(x), ch.dc, 5e-4)
	})
}

// floor is the mean power that a line of no hum would show near 50 Hz's
// harmonic k: measured at eight places between it and the next.
func floor(x []float64, k, rate int) float64 {
	var sum float64
	for i := range 8 {
		sum += line(x, mains*float64(k)+20+1.5*float64(i), rate)
	}
	return sum / 8
}

// Hum stands at its stated level wherever it can be measured: noise 20 dB below
// a line moves it by at most 0.83 dB at its RMS, by 1.6 dB at twice that. The
// first three lines must be measurable.
func TestHum(t *testing.T) {
	eachChannel(t, withHum, func(t *testing.T, s scene, ch channel, x []float64) {
		x = x[s.quiet.from:s.quiet.to]
		for i, relative := range humLines {
			level, noise := dB(line(x, mains*float64(i+1), s.rate)), dB(floor(x, i+1, s.rate))
			if !(level-noise >= 20) {
				t.Logf("line %d: %.1f dBFS, only %.1f dB over the noise", i+1, level, level-noise)
				if i < 3 {
					t.Errorf("line %d stands %.1f dB over the noise, want at least 20", i+1, level-noise)
				}
				continue
			}
			within(t, "line, dBFS", level, ch.hum+relative, 1.6)
		}
	})
}

// Where a channel has no hum, the places of its harmonics look like the places
// between. The power of noise in one bin is exponentially distributed: 8 times
// its mean (9 dB) is exceeded once in 3000. The line at 50 Hz itself is left
// out, as the rumble of the hull reaches it.
func TestNoHum(t *testing.T) {
	eachChannel(t, noHum, func(t *testing.T, s scene, ch channel, x []float64) {
		x = x[s.quiet.from:s.quiet.to]
		for k := 2; k <= len(humLines); k++ {
			over := dB(line(x, mains*float64(k), s.rate)) - dB(floor(x, k, s.rate))
			t.Logf("%.0f Hz: %.1f dB over the noise, allowed 9", mains*float64(k), over)
			if !(over <= 9) {
				t.Errorf("%.0f Hz stands %.1f dB over the noise, allowed 9", mains*float64(k), over)
			}
		}
	})
}

// humPower is the power of all lines of a channel's hum.
func (ch channel) humPower() float64 {
	var sum float64
	for _, relative := range humLines {
		sum += power(ch.hum) * math.Pow(10, relative/10)
	}
	return sum
}

// Rumble below 60 Hz has its stated level and its stated share of the
// background. The hull's noise holds 0.16 of its power and beats with the lines
// that hold 0.84; half a second has some 8 independent values of a noise 15 Hz
// wide, so the power wanders by about 2·√(0.84·0.16/8) = 0.26 of itself, 1 dB.
// 1.5 dB of rumble move a share of one half by 0.1.
func TestRumble(t *testing.T) {
	eachChannel(t, every, func(t *testing.T, s scene, ch channel, x []float64) {
		x = x[s.quiet.from:s.quiet.to]
		low := band(x, 3, 60, s.rate)
		if ch.hum != 0 {
			low -= line(x, mains, s.rate)
		}
		within(t, "rumble, dBFS", dB(low), ch.rumble, 1.5)

		total := power(ch.rumble) + ch.humPower() + power(ch.hiss) + power(ch.water)
		share := low / band(x, 3, float64(s.rate)/2, s.rate)
		within(t, "share of the background", share, power(ch.rumble)/total, 0.1)
	})
}

// In the upper half of the spectrum the background is hiss alone. Its own
// spectrum is that of 1 - 0.4z⁻¹, |.|² = 1.16 - 0.8·cos w, so
// (1.16·π/2 + 0.8) / (1.16·π) = 0.7195 of its power lies there. The span has at
// least 7800 values in that half: its power is known to 4.34·√(2/7800) = 0.07 dB,
// under the window to 0.1 dB; three times that is allowed.
func TestHiss(t *testing.T) {
	eachChannel(t, every, func(t *testing.T, s scene, ch channel, x []float64) {
		x = x[s.quiet.from:s.quiet.to]
		upper := band(x, float64(s.rate)/4, float64(s.rate)/2, s.rate)
		within(t, "hiss in the upper half, dBFS", dB(upper), ch.hiss+dB(0.7195), 0.3)
	})
}

// Beside the speech the hum is a nuisance, not a disaster: 12 to 30 dB below it
// (common practice, no source).
func TestHumBesideSpeech(t *testing.T) {
	eachChannel(t, withSpeech, func(t *testing.T, s scene, ch channel, x []float64) {
		background := variance(x[s.quiet.from:s.quiet.to])
		speech := variance(x[s.phrases[0].at:s.quiet.from]) - background
		ratio := dB(speech / ch.humPower())
		t.Logf("speech %.1f dBFS, %.1f dB over the hum", dB(speech), ratio)
		if !(ratio >= 12 && ratio <= 30) {
			t.Errorf("speech stands %.1f dB over the hum, want 12 to 30", ratio)
		}
	})
}
