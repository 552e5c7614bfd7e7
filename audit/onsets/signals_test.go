package onsets

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"fettle/audio"
	"fettle/filter"

	goaudio "github.com/go-audio/audio"
)

// within fails the test unless got lies within tol of want; NaN fails.
func within(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s: %.9g, want %.9g within %.3g (off by %.3g)", what, got, want, tol, got-want)
	}
}

// source plays signals side by side, one a channel.
func source(rate int, channels ...[]float64) audio.Source {
	var x []float64
	for i := range channels[0] {
		for _, c := range channels {
			x = append(x, c[i])
		}
	}
	return audio.FromFrames(&goaudio.Format{SampleRate: rate, NumChannels: len(channels)}, x)
}

func detect(t testing.TB, rate int, channels ...[]float64) []Onset {
	t.Helper()
	var list []Onset
	if err := Detect(source(rate, channels...), func(o Onset) { list = append(list, o) }); err != nil {
		t.Fatal(err)
	}
	return list
}

// compared measures one channel and lists all its onsets.
func compared(t testing.TB, rate int, x, y []float64) (*Channel, []Onset) {
	t.Helper()
	r, err := Measure(source(rate, x), source(rate, y), Options{Strongest: 1000})
	if err != nil {
		t.Fatal(err)
	}
	slices.SortFunc(r.Strongest, func(a, b Onset) int {
		if a.Time < b.Time {
			return -1
		}
		return 1
	})
	return r.Channels[0], r.Strongest
}

// silence is so many seconds of it.
func silence(rate int, seconds float64) []float64 { return make([]float64, int(seconds*float64(rate))) }

// tone adds a sine of a frequency in Hz from a time on, under an envelope of the
// time since.
func tone(x []float64, rate int, hz, at float64, amplitude func(t float64) float64) {
	for n := range x {
		if t := float64(n)/float64(rate) - at; t >= 0 {
			x[n] += amplitude(t) * math.Sin(2*math.Pi*hz*t)
		}
	}
}

// noise adds white noise of an RMS value.
func noise(x []float64, rms float64, seed uint64) []float64 {
	r := rand.New(rand.NewPCG(seed, 2))
	for n := range x {
		x[n] += rms * r.NormFloat64()
	}
	return x
}

// ramp rises from 0 to 1 in a straight line.
func ramp(seconds float64) func(float64) float64 {
	return func(t float64) float64 { return min(t/seconds, 1) }
}

// decay falls to 1/e in so many seconds.
func decay(seconds float64) func(float64) float64 {
	return func(t float64) float64 { return math.Exp(-t / seconds) }
}

// delayed is x later by whole samples.
func delayed(x []float64, samples int) []float64 {
	y := make([]float64, len(x))
	for n := range y {
		if i := n - samples; i >= 0 && i < len(x) {
			y[n] = x[i]
		}
	}
	return y
}

func scaled(x []float64, by float64) []float64 {
	y := slices.Clone(x)
	for n := range y {
		y[n] *= by
	}
	return y
}

func reversed(x []float64) []float64 {
	y := slices.Clone(x)
	slices.Reverse(y)
	return y
}

// filtered is x through a chain of the product, aligned.
func filtered(t testing.TB, rate int, x []float64, stages string, as filter.Realisation) []float64 {
	t.Helper()
	c, err := filter.Parse([]byte("stages: ["+stages+"]\nedges: silence\n"), "chain.yaml")
	if err != nil {
		t.Fatal(err)
	}
	f, err := c.Realise(rate, as)
	if err != nil {
		t.Fatal(err)
	}
	src, err := f.Apply(source(rate, x))
	if err != nil {
		t.Fatal(err)
	}
	y := make([]float64, len(x))
	if n, err := fill(src, y); n != len(y) || err != nil {
		t.Fatal(n, err)
	}
	return y
}

// strikes is a scene of clicks, struck tones and noise bursts at known times, over
// hiss of an RMS value, hum 17 dB and rumble 23 dB over it.
func strikes(rate int, seconds, every, hiss float64) (x, at []float64) {
	r := rand.New(rand.NewPCG(7, uint64(rate)))
	fs := float64(rate)
	x = silence(rate, seconds)
	for when := 0.5; when < seconds-0.5; when += every * (0.6 + 0.8*r.Float64()) {
		first := int(when * fs)
		at = append(at, float64(first)/fs)
		strike(x[first:], fs, r)
	}
	noise(x, hiss, 3)
	for n := range x {
		t := float64(n) / fs
		x[n] += math.Sqrt2 * hiss * (7*math.Sin(2*math.Pi*50*t) + 14*math.Sin(2*math.Pi*11*t))
	}
	return x, at
}

// strike adds one of three kinds of event from the first sample on.
func strike(x []float64, fs float64, r *rand.Rand) {
	level, hz, fall := 0.1+0.5*r.Float64(), 200*math.Pow(2, 4*r.Float64()), decay(0.01+0.03*r.Float64())
	kind := r.IntN(3)
	for n := range x {
		t := float64(n) / fs
		v := level * fall(t)
		switch kind {
		case 0:
			v *= math.Sin(2 * math.Pi * hz * t)
		case 1:
			v *= 0.5 * r.NormFloat64()
		case 2:
			if t > 20e-6 { // as long at every rate
				return
			}
		}
		if t > 0.4 {
			return
		}
		x[n] += v
	}
}
