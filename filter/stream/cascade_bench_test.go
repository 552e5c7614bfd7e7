package stream

import (
	"fmt"
	"slices"
	"testing"

	"fettle/filter/response"
	"fettle/filter/stream/machine"
)

// BenchmarkCascade has its reference in testdata/cascade.py.
func BenchmarkCascade(b *testing.B) {
	for _, kernel := range machine.Available() {
		for _, count := range []int{1, 2, 3, 4, 6, 8, 12, 16} {
			for _, channels := range []int{1, 2, 3, 6} {
				b.Run(fmt.Sprintf("%v/sections=%d/channels=%d", kernel, count, channels), func(b *testing.B) {
					sections := slices.Repeat([]response.Section{highpass(70./48000, 0.7)}, count)
					benchKernel(b, NewCascade(sections, channels, kernel), channels)
				})
			}
		}
	}
}

// BenchmarkCascadeDecay filters clicks a second apart. What is between decays: with
// the high-passes through all that is audible and beyond, with the poles near the
// origin to denormal numbers if it were let. The rate should be that of noise.
func BenchmarkCascadeDecay(b *testing.B) {
	const second = 48000
	for _, poles := range []struct {
		name    string
		section response.Section
	}{
		{"70 Hz", highpass(70./48000, 0.7)},
		{"0.35", response.Section{B0: 1, B1: -0.5, A1: -0.7, A2: 0.1225}},
		{"0.2", response.Section{B0: 1, B1: -0.5, A1: -0.4, A2: 0.04}},
	} {
		for _, kernel := range machine.Available() {
			k := NewCascade(slices.Repeat([]response.Section{poles.section}, 4), 2, kernel)
			name := fmt.Sprintf("poles=%s/%v/", poles.name, kernel)
			b.Run(name+"noise", func(b *testing.B) { benchCascade(b, k, noisePlanes(1, 2, second)) })
			b.Run(name+"clicks", func(b *testing.B) { benchCascade(b, k, [][]float64{impulse(0, second), impulse(0, second)}) })
		}
	}
}

func benchCascade(b *testing.B, k *Cascade, x [][]float64) {
	y := planes(len(x), len(x[0]))
	for b.Loop() {
		k.Process(y, x)
	}
	reportRate(b, len(x)*len(x[0]))
}
