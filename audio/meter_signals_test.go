package audio

import (
	"math"
	"math/rand/v2"
	"slices"

	"pgregory.net/rapid"
)

// hardSignals are what a meter that passes windows over may trip on.
var hardSignals = map[string]func(r *rand.Rand, i int) float64{
	"noise":       func(r *rand.Rand, _ int) float64 { return 2*r.Float64() - 1 },
	"silence":     func(*rand.Rand, int) float64 { return 0 },
	"impulses":    func(r *rand.Rand, _ int) float64 { return math.Floor(r.Float64() + 1./30) },
	"signs":       func(r *rand.Rand, _ int) float64 { return float64(2*r.IntN(2) - 1) },
	"alternating": func(r *rand.Rand, i int) float64 { return float64(1-2*(i&1)) * float64(2*((i/13)&1)-1) },
	"plateau":     func(r *rand.Rand, i int) float64 { return float64((i/9)%2) * (1 - 1e-9*r.Float64()) },
	"growing":     func(_ *rand.Rand, i int) float64 { return math.Exp(float64(i)/150-10) * math.Sin(0.7*float64(i)) },
	"high tone":   func(_ *rand.Rand, i int) float64 { return math.Sin(2.7 * float64(i)) },
	"low tone":    func(_ *rand.Rand, i int) float64 { return math.Sin(0.05 * float64(i)) },
	"clipped":     func(_ *rand.Rand, i int) float64 { return max(-1, min(1, 3*math.Sin(0.2*float64(i)))) },
}

// drawHard is n frames up to 1 of pieces of hard signals, at different levels.
func drawHard(t *rapid.T, n int) []float64 {
	names := make([]string, 0, len(hardSignals))
	for name := range hardSignals {
		names = append(names, name)
	}
	slices.Sort(names)
	r := rand.New(rand.NewPCG(rapid.Uint64().Draw(t, "seed"), 1))
	x := make([]float64, 0, n)
	for len(x) < n {
		signal := hardSignals[rapid.SampledFrom(names).Draw(t, "signal")]
		level := rapid.SampledFrom([]float64{1, 0.999, 0.7, 0.4, 0.01}).Draw(t, "level")
		for i := range min(n-len(x), rapid.IntRange(1, 1500).Draw(t, "length")) {
			x = append(x, level*max(-1, min(1, signal(r, i))))
		}
	}
	return x
}

// interleave puts each channel's own samples side by side.
func interleave(channels [][]float64) []float64 {
	x := make([]float64, 0, len(channels)*len(channels[0]))
	for i := range channels[0] {
		for _, c := range channels {
			x = append(x, c[i])
		}
	}
	return x
}
