package abreast

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"fettle/filter/response"
	"fettle/filter/stream/machine"
)

// inAssembly are the kernels in assembly that run here; without any the test is
// skipped.
func inAssembly(t *testing.T) []machine.Kernel {
	kernels := machine.Available()[1:]
	if len(kernels) == 0 {
		t.Skip("missing: AVX2 and FMA, or the build has the tag purego")
	}
	return kernels
}

// atEachChain runs a test for every function in assembly that runs here.
func atEachChain(t *testing.T, test func(t *testing.T, s shape)) {
	for _, k := range inAssembly(t) {
		for _, s := range shapes(k) {
			t.Run(fmt.Sprintf("%v/%d sections/%d channels", k, s.sections, s.channels), func(t *testing.T) { test(t, s) })
		}
	}
}

// fused is what a chain must equal bit for bit: one section after the other, one
// channel after the other. x is from Reset on.
func fused(sections []response.Section, x []float64) []float64 {
	y := slices.Clone(x)
	for place, s := range sections {
		c1, c2 := math.FMA(-s.A1, s.B0, s.B1), math.FMA(-s.A2, s.B0, s.B2)
		state := make([]float64, 3)
		r, q, e := &state[0], &state[1], &state[2]
		for n, v := range y {
			if (n+skew*place)%Period == 0 {
				quieten(state)
			}
			y[n] = math.FMA(s.B0, v, *r)
			*q, *r = *r, math.FMA(-s.A1, *r, math.FMA(-s.A2, *q, math.FMA(c1, v, *e)))
			*e = c2 * v
		}
	}
	return y
}

// resonances are sections with poles of radius 0.3 to 0.999 or so and zeros
// anywhere, of about unit gain.
func resonances(seed uint64, count int) []response.Section {
	r := rand.New(rand.NewPCG(seed, 0))
	sections := make([]response.Section, count)
	for i := range sections {
		radius := 1 - math.Pow(10, -0.15-2.85*r.Float64())
		angle := math.Pi * r.Float64()
		g := 1 - radius
		sections[i] = response.Section{
			B0: g * (1 + r.Float64()), B1: g * (2*r.Float64() - 1), B2: g * r.NormFloat64(),
			A1: -2 * radius * math.Cos(angle), A2: radius * radius,
		}
	}
	return sections
}

// noise is evenly spread over -size to size.
func noise(seed uint64, channels, frames int, size float64) [][]float64 {
	r := rand.New(rand.NewPCG(seed, 1))
	x := planes(channels, frames)
	for _, v := range x {
		for i := range v {
			v[i] = size * (2*r.Float64() - 1)
		}
	}
	return x
}

func planes(channels, frames int) [][]float64 {
	x := make([][]float64, channels)
	for c := range x {
		x[c] = make([]float64, frames)
	}
	return x
}

// run puts all of src through a pass, cut into pieces of the lengths next gives.
func (p *pass) run(dst, src [][]float64, next func() int) {
	for from := 0; from < len(src[0]); {
		to := min(len(src[0]), from+next())
		p.filter(dst, src, from, to, (Period-from%Period)%Period)
		from = to
	}
}

// pieces are of a length, or with 0 of random ones round the chain's own.
func pieces(length int) func() int {
	if length > 0 {
		return func() int { return length }
	}
	r := rand.New(rand.NewPCG(2, 0))
	return func() int { return 1 + r.IntN([]int{5, 70, 700}[r.IntN(3)]) }
}

// TestChainsEqualFused: full and partly filled chains, loud and so quiet that
// states are set to zero all the time, in pieces shorter and longer than it takes
// the last section to begin, and than a period.
func TestChainsEqualFused(t *testing.T) {
	atEachChain(t, func(t *testing.T, s shape) {
		for _, count := range []int{1, s.sections/2 + 1, s.sections} {
			sections := resonances(uint64(count), count)
			for _, size := range []float64{1, quietest} {
				x := noise(3, s.channels, 3*Period+7, size)
				for _, length := range []int{1, 2, 3, 4, 7, 13, 60, 61, Period - 1, Period, Period + 1, 5000, 0} {
					y := planes(s.channels, len(x[0]))
					newPass(s, sections, 0, true).run(y, x, pieces(length))
					for c := range y {
						sameBits(t, fmt.Sprintf("%d sections, %g loud, pieces of %d, channel %d", count, size, length, c), y[c], fused(sections, x[c]))
					}
				}
			}
		}
	})
}

// TestFlushShows: the quiet input of the test above is one where it matters when
// states are set to zero.
func TestFlushShows(t *testing.T) {
	sections := resonances(4, 4)
	x := noise(3, 1, 3*Period, quietest)[0]
	y := fused(sections, x)
	for i := range x {
		x[i] /= quietest
	}
	for i, v := range fused(sections, x) {
		if math.Abs(v*quietest-y[i]) > 1e-3*quietest {
			return
		}
	}
	t.Error("nothing was set to zero")
}

// TestChainsKeepToTheirMemory: NaN round the input does not get in and what is
// round the output stays, at any place in memory.
func TestChainsKeepToTheirMemory(t *testing.T) {
	atEachChain(t, func(t *testing.T, s shape) {
		sections := resonances(5, s.sections)
		for _, frames := range []int{1, 3, 4, 5, 31, 32, 100} {
			for offset := range 8 {
				x := noise(6, s.channels, frames, 1)
				src, dst := planes(s.channels, frames+40), planes(s.channels, frames+40)
				for c := range x {
					fill(src[c], math.NaN())
					fill(dst[c], 0.25)
					copy(src[c][16+offset:], x[c])
				}
				newPass(s, sections, 0, true).filter(dst, src, 16+offset, 16+offset+frames, 0)
				for c := range x {
					want := make([]float64, len(dst[c]))
					fill(want, 0.25)
					copy(want[16+offset:], fused(sections, x[c]))
					sameBits(t, fmt.Sprintf("%d frames at %d, channel %d", frames, offset, c), dst[c], want)
				}
			}
		}
	})
}

func fill(x []float64, v float64) {
	for i := range x {
		x[i] = v
	}
}

func sameBits(t *testing.T, what string, got, want []float64) {
	t.Helper()
	for i := range want {
		if got[i] != want[i] {
			t.Fatalf("%s: sample %d is %v, want %v", what, i, got[i], want[i])
		}
	}
	if len(got) != len(want) {
		t.Fatalf("%s: %d samples, want %d", what, len(got), len(want))
	}
}
