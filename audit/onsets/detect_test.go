package onsets

import (
	"fmt"
	"math"
	"testing"
)

// Every event is found and nothing else, at every rate; and to the millisecond that
// the definition leaves between a click and the first quarter wave of a low tone.
func TestOnsetsOfAScene(t *testing.T) {
	for _, rate := range []int{8000, 16000, 44100, 48000, 96000, 192000} {
		seconds := min(40, 1.2e6/float64(rate))
		for _, hiss := range []float64{0, 1e-4} { // -80 dB, so hum at -63 and rumble at -57
			x, at := strikes(rate, seconds, 0.25, hiss)
			hits, extra := match(detect(t, rate, x), at, 1e-3)
			recall := float64(hits) / float64(len(at))
			t.Logf("%d Hz, hiss %g: %d of %d found, %d besides", rate, hiss, hits, len(at), extra)
			if !(recall >= 0.99) || extra > 0 {
				t.Errorf("%d Hz, hiss %g: %d of %d onsets found, %d besides", rate, hiss, hits, len(at), extra)
			}
		}
	}
}

// In hiss at -60 dB the weakest events are within 13 dB of it: fewer are clear, but
// still nothing else is taken for one.
func TestOnsetsInNoise(t *testing.T) {
	for _, rate := range []int{16000, 48000} {
		x, at := strikes(rate, 30, 0.25, 1e-3)
		hits, extra := match(detect(t, rate, x), at, 1e-3)
		t.Logf("%d Hz: %d of %d found, %d besides", rate, hits, len(at), extra)
		if !(float64(hits) >= 0.85*float64(len(at))) || extra > 0 {
			t.Errorf("%d Hz: %d of %d onsets found, %d besides", rate, hits, len(at), extra)
		}
	}
}

// match counts the known times that were found and the onsets that are none of them.
func match(found []Onset, at []float64, tolerance float64) (hits, extra int) {
	for _, o := range found {
		hit := false
		for _, a := range at {
			hit = hit || math.Abs(o.Time-a) <= tolerance
		}
		if hit {
			hits++
		} else {
			extra++
		}
	}
	return hits, extra
}

// What begins slowly, or does not begin at all, has no onset.
func TestNoOnset(t *testing.T) {
	const rate = 48000
	whole := func(float64) float64 { return 0.3 }
	signals := map[string]func(x []float64){
		"silence":        func([]float64) {},
		"offset":         func(x []float64) { shift(x, 0.2) },
		"tone of 60 Hz":  func(x []float64) { tone(x, rate, 60, 0, whole) },
		"tone of 997 Hz": func(x []float64) { tone(x, rate, 997, 0, whole) },
		"tone of 15 kHz": func(x []float64) { tone(x, rate, 15000, 0, whole) },
		"white noise":    func(x []float64) { noise(x, 0.1, 1) },
		"faint noise":    func(x []float64) { noise(x, 1e-5, 1) },
		"two tones that beat": func(x []float64) {
			tone(x, rate, 440, 0, whole)
			tone(x, rate, 444, 0, whole)
		},
		"vibrato": func(x []float64) {
			for n := range x {
				at := float64(n) / rate
				x[n] = 0.3 * math.Sin(2*math.Pi*600*at+12*math.Sin(2*math.Pi*6*at))
			}
		},
		"chirp": func(x []float64) {
			for n := range x {
				at := float64(n) / rate
				x[n] = 0.3 * math.Sin(2*math.Pi*100/0.5*math.Expm1(0.5*at))
			}
		},
		"fade of 0.15 s":  func(x []float64) { tone(x, rate, 997, 1, ramp(0.15)) },
		"fade of 1 s":     func(x []float64) { tone(x, rate, 997, 1, ramp(1)) },
		"fade of noise":   func(x []float64) { noise(x, 0.1, 1); fade(x, rate, 1, 2) },
		"hum and rumble":  func(x []float64) { tone(x, rate, 50, 0, whole); tone(x, rate, 150, 0, whole); rumble(x, rate) },
		"sound that ends": func(x []float64) { noise(x, 0.1, 1); clear(x[3*rate:]) },
	}
	for name, make := range signals {
		x := silence(rate, 8)
		make(x)
		if got := detect(t, rate, x); len(got) > 0 {
			t.Errorf("%s: %d onsets, the first at %.4f s: %+v", name, len(got), got[0].Time, got[0])
		}
	}
}

func shift(x []float64, by float64) {
	for n := range x {
		x[n] += by
	}
}

// fade turns x up in a straight line between two times.
func fade(x []float64, rate, from, to int) {
	for n := range x {
		x[n] *= min(max(float64(n-from*rate)/float64((to-from)*rate), 0), 1)
	}
}

// rumble adds noise below some 30 Hz.
func rumble(x []float64, rate int) {
	y := noise(make([]float64, len(x)), 1, 5)
	pole := math.Exp(-2 * math.Pi * 25 / float64(rate))
	var a, b float64
	for n, v := range y {
		a += (1 - pole) * (v - a)
		b += (1 - pole) * (a - b)
		x[n] += 10 * b
	}
}

// A click is timed 0.31 ms early and rises for 0.59 ms: half the Hann window
// less lead, and the window's own rise, acos(0.8)/π of it.
func TestClick(t *testing.T) {
	for _, rate := range []int{16000, 48000, 192000} {
		x := silence(rate, 2)
		at := rate + rate/7
		x[at] = 0.5
		got := detect(t, rate, x)
		if len(got) != 1 {
			t.Fatalf("%d Hz: %d onsets", rate, len(got))
		}
		// Where (1 + cos(2πu))/2 = 0.1: u = -acos(-0.8)/2π.
		early := math.Acos(-0.8)/(2*math.Pi)*smoothing - lead
		within(t, "early", float64(at)/float64(rate)-got[0].Time, early, 20e-6)
		within(t, "in ms", 1e3*early, 0.313, 0.001)
		rise := (math.Acos(-0.8) - math.Acos(0.8)) / (2 * math.Pi) * smoothing
		within(t, "rise", got[0].Rise, rise, 20e-6)
		within(t, "in ms", 1e3*rise, 0.59, 0.001)
		within(t, "level", got[0].Level, 10*math.Log10(0.25*2/(smoothing*float64(rate))), 0.2) // less the high-pass
	}
}

// A tone that begins at once is timed where it begins, whatever the rate.
func TestStepOfATone(t *testing.T) {
	for _, rate := range []int{16000, 44100, 96000} {
		for _, at := range []float64{1, 1.23456} {
			x := silence(rate, 2.5)
			tone(x, rate, 6000, at, func(float64) float64 { return 0.4 })
			got := detect(t, rate, x)
			if len(got) != 1 {
				t.Fatalf("%d Hz: %d onsets", rate, len(got))
			}
			within(t, fmt.Sprint(rate, " Hz: time"), got[0].Time, at, 20e-6)
			within(t, "level", got[0].Level, 10*math.Log10(0.08), 0.05)
		}
	}
}

// Where the amplitude rises in a straight line for R, power is (t/R)², and
// (t² + s²)/R² under a window of variance s²: for Hann's of length W, s² =
// W²(1/12 - 1/2π²). Nine tenths must lie a millisecond before the line's end.
func TestRiseOfALine(t *testing.T) {
	const rate = 48000
	variance := smoothing * smoothing * (1.0/12 - 1/(2*math.Pi*math.Pi))
	for _, r := range []float64{0.020, 0.030, 0.040} {
		x := silence(rate, 2)
		tone(x, rate, 5000, 1, ramp(r))
		got := detect(t, rate, x)
		if len(got) != 1 {
			t.Fatalf("rise of %g s: %d onsets", r, len(got))
		}
		tenth, nine := math.Sqrt(0.1*r*r-variance), math.Sqrt(0.9*r*r-variance)
		within(t, fmt.Sprintf("rise of %g s", r), got[0].Rise, nine-tenth, 0.003*r)
		within(t, fmt.Sprintf("time of %g s", r), got[0].Time, 1+tenth+lead, 0.003*r)
	}
}

// The step response of first order: amplitude 1 - e^(-t/τ), as every handbook of
// circuits has it (10 to 90 % in 2.197 τ). Of its square, a tenth is reached after
// -ln(1-√0.1) = 0.380 τ, nine tenths after 2.970 τ.
func TestRiseOfFirstOrder(t *testing.T) {
	const rate, tau = 48000, 5e-3
	x := silence(rate, 2)
	tone(x, rate, 5000, 1, func(t float64) float64 { return 1 - math.Exp(-t/tau) })
	got := detect(t, rate, x)
	if len(got) != 1 {
		t.Fatalf("%d onsets", len(got))
	}
	within(t, "rise", got[0].Rise, tau*(2.9697-0.3801), 0.02*tau)
	within(t, "time", got[0].Time-lead, 1+0.3801*tau, 0.02*tau)
}

// Times and rises do not depend on the level, nor on an offset.
func TestLevelAndOffset(t *testing.T) {
	x, _ := strikes(16000, 10, 0.3, 0)
	want := detect(t, 16000, x)
	if len(want) < 20 {
		t.Fatalf("%d onsets", len(want))
	}
	// -40 dB leaves the weakest click over -80 dB.
	for _, by := range []float64{8, -1, 1e-2} {
		y := scaled(x, by)
		shift(y, by/4)
		got := detect(t, 16000, y)
		if len(got) != len(want) {
			t.Fatalf("times %g: %d onsets, want %d", by, len(got), len(want))
		}
		for i, o := range got {
			within(t, "time", o.Time, want[i].Time, 1e-9)
			within(t, "level", o.Level, want[i].Level+20*math.Log10(math.Abs(by)), 1e-6)
		}
	}
}

// Under -80 dB an onset is weak.
func TestWeakOnset(t *testing.T) {
	x := silence(48000, 2)
	tone(x, 48000, 1000, 1, func(float64) float64 { return 1e-4 })
	c, list := compared(t, 48000, x, x)
	if c.Onsets != 0 || c.Weak != 1 || len(list) != 0 {
		t.Errorf("%d onsets, %d weak", c.Onsets, c.Weak)
	}
	if c.NotStated["shift"] == "" || !math.IsNaN(c.Shift.Worst) {
		t.Errorf("shift %+v with no reason in %v", c.Shift, c.NotStated)
	}
}

// An offset that is switched on is an onset, timed as a step: what lies over 100 Hz
// of it is sharp.
func TestSwitchedOffset(t *testing.T) {
	x := silence(48000, 2)
	shift(x[48000:], 0.2)
	got := detect(t, 48000, x)
	if len(got) != 1 {
		t.Fatalf("%d onsets", len(got))
	}
	within(t, "time", got[0].Time, 1, 0.2e-3)
}

// An onset wants 20 ms of recording before it and is found at once after that.
func TestFirstOnset(t *testing.T) {
	const rate = 48000
	for _, c := range []struct {
		at     float64
		onsets int
	}{{0, 0}, {0.015, 0}, {0.05, 1}} {
		x := silence(rate, 1)
		tone(x, rate, 2000, c.at, decay(0.05))
		if got := detect(t, rate, x); len(got) != c.onsets {
			t.Errorf("after %g s: %d onsets, want %d", c.at, len(got), c.onsets)
		}
	}
}

// A sound that swells, falls back, and then sets in has two beginnings.
func TestTurnBack(t *testing.T) {
	const rate = 48000
	steps := func(first, second float64) []Onset {
		x := silence(rate, 2)
		tone(x, rate, 6000, 1, func(t float64) float64 {
			switch {
			case t < 0.003:
				return math.Sqrt(first)
			case t < 0.006:
				return math.Sqrt(second)
			}
			return 1
		})
		return detect(t, rate, x)
	}
	if got := steps(0.07, 0.07); len(got) != 1 {
		t.Errorf("a step on the way: %d onsets", len(got))
	}
	if got := steps(0.14, 0.07); len(got) != 0 {
		t.Errorf("turned back: %+v", got)
	}
}

// What was loud a minute ago does not hide what is soft; nor does the end of the
// recording hide what came just before.
func TestSoftAndLateOnsets(t *testing.T) {
	const rate = 8000
	x := silence(rate, 61)
	tone(x[:2*rate], rate, 1000, 1, decay(0.05))
	tone(x, rate, 1000, 60, func(t float64) float64 { return 5e-4 * math.Exp(-t/0.05) })
	for _, end := range []float64{61, 60.06} {
		got := detect(t, rate, x[:int(end*rate)])
		if len(got) != 2 || math.Abs(got[1].Time-60) > 1e-3 {
			t.Errorf("up to %g s: %+v", end, got)
		}
	}
}

// Out of a tone that sounds already, an onset is one from 13 dB on.
func TestOnsetOutOfATone(t *testing.T) {
	const rate = 48000
	for _, c := range []struct {
		db     float64
		onsets int
	}{{6, 0}, {11, 0}, {12.5, 0}, {13.5, 1}, {20, 1}} {
		x := silence(rate, 3)
		tone(x, rate, 5000, 0, func(t float64) float64 {
			if t < 1.5 {
				return 0.5 * math.Pow(10, -c.db/20)
			}
			return 0.5
		})
		if got := detect(t, rate, x); len(got) != c.onsets {
			t.Errorf("%g dB: %d onsets, want %d", c.db, len(got), c.onsets)
		}
	}
}

// A rise is stated unless the envelope comes near nine tenths and turns back.
func TestRiseThatTurnsBack(t *testing.T) {
	const rate = 48000
	for _, c := range []struct {
		first  float64 // power of the first part
		stated bool
	}{{0.7, true}, {0.85, false}, {0.95, false}, {0.99, true}} {
		x := silence(rate, 2)
		tone(x, rate, 6000, 1, func(t float64) float64 {
			switch {
			case t < 0.004:
				return 0.5 * math.Sqrt(c.first)
			case t < 0.008:
				return 0.5 * math.Sqrt(0.5)
			}
			return 0.5
		})
		got := detect(t, rate, x)
		if len(got) != 1 || math.IsNaN(got[0].Rise) == c.stated {
			t.Errorf("first to %g: %+v", c.first, got)
		}
	}
}
