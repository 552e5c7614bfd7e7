package stream

import (
	"math"
	"math/bits"

	"fettle/filter/stream/lanes"
	"fettle/filter/stream/machine"
)

// Costs are in nanoseconds on the machine that costs.go was measured on; only
// their ratios matter. directCosts are for a sample of one channel by direct
// summation: the first for the sample itself, the second for each tap.

// blockCosts is what a kernel takes for a block of lanes.MinSize points and of
// each next power of two, with all that goes on around it.
type blockCosts []float64

// of returns the cost of a block of size points. Beyond what was measured a
// block of twice the size is taken for slightly more than twice the work.
func (c blockCosts) of(size int) float64 {
	i := 0
	for n := lanes.MinSize; n < size; n *= 2 {
		i++
	}
	if last := len(c) - 1; i > last {
		return c[last] * math.Pow(2.1, float64(i-last))
	}
	return c[i]
}

// blockSize plans: it returns the points of a block, 0 for direct summation, that
// take a stream of run.Frames the least time. It is a pure function of its
// arguments and of the constants in costs.go, so that the same stream always
// gives the same bytes.
//
// A large block loses less of itself to the overlap, but leaves the near caches,
// and of a short stream its end is empty.
func blockSize(taps, channels int, run Run) int {
	best, least := 0, directCost(taps, channels, run)
	for size := lanes.MinSize; size <= largestBlock(taps); size *= 2 {
		if size < taps {
			continue
		}
		if cost := blocksCost(taps, size, channels, run); cost < least {
			best, least = size, cost
		}
	}
	return best
}

// largestBlock bounds what a block takes in memory, which is some 100 bytes a
// point: 26 MB, or what leaves long taps at most half of a block.
func largestBlock(taps int) int {
	return min(lanes.MaxSize, max(1<<18, 2<<bits.Len(uint(taps-1))))
}

// unknownLength is how long a stream is taken to be of which nothing is known.
const unknownLength = 1 << 30

// length is how many samples of a channel go through, the filter's tail included.
func (r Run) length(taps int) float64 {
	if r.Frames < 0 {
		return unknownLength
	}
	return float64(r.Frames) + float64(taps) - 1
}

func directCost(taps, channels int, run Run) float64 {
	return run.length(taps) * float64(channels) * (directCosts[0] + directCosts[1]*float64(taps))
}

func blocksCost(taps, size, channels int, run Run) float64 {
	hops := math.Ceil(run.length(taps) / float64(size-taps+1))
	blocks := hops*float64(channels/2) + math.Ceil(hops/2)*float64(channels%2)
	return blocks * measured[run.Kernel].of(size)
}

// measured has a row for each kernel.
var measured = map[machine.Kernel]blockCosts{
	machine.Portable: portableCosts,
	machine.AVX2:     avx2Costs,
	machine.AVX512:   avx512Costs,
}
