package filter

import (
	"io"
	"math"
	"math/rand/v2"
	"testing"

	"fettle/audio"

	goaudio "github.com/go-audio/audio"
)

// parsed reads a chain that must be sound.
func parsed(t testing.TB, text string) *Chain {
	t.Helper()
	c, err := Parse([]byte(text), "chain.yaml")
	if err != nil {
		t.Fatal(err)
	}
	return c
}

// realised builds a chain that must be sound at a rate.
func realised(t testing.TB, text string, rate int, as Realisation) *Filter {
	t.Helper()
	f, err := parsed(t, text).Realise(rate, as)
	if err != nil {
		t.Fatal(err)
	}
	return f
}

// applied runs interleaved samples through a filter, read in calls of step frames.
func applied(t testing.TB, f *Filter, channels int, samples []float64, step int) []float64 {
	t.Helper()
	src, err := f.Apply(audio.FromFrames(&goaudio.Format{SampleRate: f.Rate(), NumChannels: channels}, samples))
	if err != nil {
		t.Fatal(err)
	}
	return drained(t, src, step)
}

func drained(t testing.TB, src audio.Source, step int) []float64 {
	t.Helper()
	channels := src.Format().NumChannels
	var out []float64
	for buf := make([]float64, step*channels); ; {
		n, err := src.ReadFrames(buf)
		if err == io.EOF {
			return out
		}
		if err != nil {
			t.Fatal(err)
		}
		if n == 0 {
			t.Fatal("ReadFrames gave no frames and no error")
		}
		out = append(out, buf[:n*channels]...)
	}
}

func noise(seed uint64, n int) []float64 {
	r := rand.New(rand.NewPCG(seed, 1))
	x := make([]float64, n)
	for i := range x {
		x[i] = 2*r.Float64() - 1
	}
	return x
}

// slowConvolve is the definition: y[n] = sum h[k] x[n-k], for n of x extended
// by silence, shifted by skip.
func slowConvolve(h, x []float64, skip int) []float64 {
	y := make([]float64, len(x))
	for n := range y {
		var sum, lost float64 // compensated, so that this is the better of the two
		for k, v := range h {
			if i := n + skip - k; i >= 0 && i < len(x) {
				term := float64(v*x[i]) - lost
				next := sum + term
				lost = (next - sum) - term
				sum = next
			}
		}
		y[n] = sum
	}
	return y
}

// worstDifference is the largest |a - b|, NaN if lengths differ or anything is NaN.
func worstDifference(a, b []float64) float64 {
	if len(a) != len(b) {
		return math.NaN()
	}
	worst := 0.0
	for i := range a {
		d := math.Abs(a[i] - b[i])
		if !(d <= worst) {
			worst = d
		}
	}
	return worst
}
