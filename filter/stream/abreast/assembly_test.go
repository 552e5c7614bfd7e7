//go:build amd64 && !purego

package abreast

import (
	"fmt"
	"math"
	"testing"

	"fettle/audio/needs"
	"fettle/filter/stream/machine"
)

// inAssembly are the kernels in assembly that run here.
func inAssembly(t *testing.T) []machine.Kernel {
	t.Helper()
	kernels := machine.Available()[1:]
	if len(kernels) == 0 {
		needs.Missing(t, "missing: a processor with AVX2 and FMA")
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

// TestArrangementIsNoMatter: a channel comes out the same from every kernel in
// assembly, alone and beside others.
func TestArrangementIsNoMatter(t *testing.T) {
	kernels := inAssembly(t)
	x := noise(13, 3, 1000, 1)
	for count := 1; count <= 20; count++ {
		sections := resonances(uint64(count), count)
		for _, kernel := range kernels {
			y := planes(3, 1000)
			New(sections, 3, kernel).Process(y, x)
			for c := range y {
				sameBits(t, fmt.Sprintf("%v, %d sections, channel %d", kernel, count, c), y[c], fused(sections, x[c]))
			}
		}
	}
}
