package audio

import (
	"math"
	"math/rand/v2"
	"testing"

	"fettle/audio/internal/vector/vectortest"
)

// BenchmarkMeter: the same in both channels, with the peak that it sets itself, with
// each set of vector instructions. Noise, music, speech and a low tone spare the
// interpolator most of the time though they are loud; a steady tone of a tenth to a
// third of the rate hardly ever does, which is the worst case, and material 8 dB or
// more below a peak always.
func BenchmarkMeter(b *testing.B) {
	const frames = 1 << 15
	tone := func(f float64) []float64 { return sine(frames, math.Round(f*frames)/frames, 1) } // in whole cycles
	bursts, quiet := tone(0.11), sine(frames, 0.11, 0.4)
	for i := range bursts {
		bursts[i] *= math.Pow(math.Sin(math.Pi*float64(i)/1024), 8)
	}
	copy(quiet, []float64{1, -1})
	for _, s := range []struct {
		name string
		x    []float64
	}{
		{"low tone", tone(0.02)}, {"tone", tone(0.11)}, {"worst tone", tone(0.29)},
		{"noise", noise(frames)}, {"music", musicLike(frames)}, {"speech", speechLike(frames)}, {"bursts", bursts}, {"quiet", quiet},
	} {
		x := interleave([][]float64{s.x, s.x})
		b.Run(s.name, func(b *testing.B) {
			vectortest.EachBenchmark(b, func(b *testing.B) {
				m := metered(x, 2)
				for b.Loop() {
					m.Add(x)
				}
				reportSamples(b, len(x))
			})
		})
	}
}

// noise is white, uniform up to full scale.
func noise(n int) []float64 {
	r := rand.New(rand.NewPCG(1, 2))
	x := make([]float64, n)
	for i := range x {
		x[i] = 2*r.Float64() - 1
	}
	return x
}

// speechLike is noise through a resonance at a twentieth of the rate, in
// syllables, its peak at full scale.
func speechLike(n int) []float64 {
	x := noise(n)
	var y1, y2 float64
	for i := range x {
		y1, y2 = x[i]+1.6*y1-0.7*y2, y1
		x[i] = y1 * math.Pow(math.Sin(math.Pi*float64(i)/8192), 2)
	}
	return toFullScale(x)
}

// musicLike is noise that falls by about 3 dB an octave, by three one-pole filters
// (figures from memory), with two beats a second at 48 kHz.
func musicLike(n int) []float64 {
	x := noise(n)
	var a, b, c float64
	for i, v := range x {
		a, b, c = 0.99765*a+0.099046*v, 0.963*b+0.2965164*v, 0.57*c+1.0526913*v
		x[i] = (a + b + c + 0.1848*v) * (0.3 + math.Exp(-float64(i%24000)/4000))
	}
	return toFullScale(x)
}

func toFullScale(x []float64) []float64 {
	peak := largest(x)
	for i := range x {
		x[i] /= peak
	}
	return x
}
