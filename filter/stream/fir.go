package stream

import (
	"math"
	"math/bits"

	"fettle/filter/stream/internal/twiddle"
)

// FIR is a filter of finite impulse response h[0] to h[len-1]:
//
//	y[n] = sum over k of h[k] x[n-k]
//
// It holds what all kernels of one filter share, is never written to after
// NewFIR and may be used by any number of goroutines.
type FIR struct {
	taps     []float64
	spectrum []complex128 // of the taps, bit-reversed, over N; nil: summed directly
	factors  []twiddle.Factor
}

// directTaps is the most taps that are summed directly. BenchmarkBlockSize
// puts the crossing there: at 24 taps 145 million samples a second directly and
// 142 by blocks, at 32 taps 107 and 147.
const directTaps = 24

// shortestBlock is the least block in points. Up to 100 taps or so, blocks of
// 256 to 1024 points measure alike; below, the overhead of a call shows.
const shortestBlock = 512

// NewFIR returns the filter with the given taps, one or more, of any size and
// sign, which are copied. It panics if there are none.
//
// The way it is computed depends on the number of taps alone: up to 24 by
// direct summation, more by overlap-save in blocks of a power of two.
func NewFIR(taps []float64) *FIR {
	if len(taps) == 0 {
		panic("stream: NewFIR without taps: one or more are needed")
	}
	return newFIR(taps, blockSize(len(taps)))
}

// newFIR is NewFIR with a block of size points, a power of two, at least 32 and
// at least 4 (len(taps)-1), or 0 for direct summation.
func newFIR(taps []float64, size int) *FIR {
	f := &FIR{taps: append([]float64(nil), taps...)}
	if size == 0 {
		return f
	}
	f.factors = twiddle.Table(size / 4)
	f.spectrum = make([]complex128, size)
	scaled := make([]float64, size)
	for i, h := range taps {
		scaled[i] = h / float64(size)
	}
	forward(f.spectrum, scaled, make([]float64, size), f.factors)
	return f
}

// blockSize returns the points of a block for a number of taps, 0 for direct
// summation: the least power of two that is at least four times the overlap,
// so between a quarter and an eighth of the work is lost to it. Half that size
// measures 30 % slower at 255 to 65535 taps; twice that size gains less than
// 10 % and doubles the delay and the memory.
func blockSize(taps int) int {
	if taps <= directTaps {
		return 0
	}
	return max(shortestBlock, 4<<bits.Len(uint(taps-2)))
}

// Taps returns how many taps there are.
func (f *FIR) Taps() int { return len(f.taps) }

// Operations returns about how many multiplications a sample of one channel
// costs: the taps themselves where they are summed directly; else, of a block of
// N points that gives a hop of two signals, two transforms of 3/4 N log4 N complex
// multiplications and N for the spectrum, four real ones each.
func (f *FIR) Operations() float64 {
	n := float64(len(f.spectrum))
	if n == 0 {
		return float64(len(f.taps))
	}
	hop := n - float64(len(f.taps)) + 1
	return 4 * n * (2*0.75*math.Log2(n)/2 + 1) / (2 * hop)
}

// Kernel returns a kernel for one stream of so many channels, one or more; it
// panics if there are none. Its Tail is Taps()-1. Its Delay is 0 where the
// taps are summed directly, else one hop for an even number of channels and
// two for an odd one, the same for all channels.
//
// Two channels share a block, as its real and imaginary part; the last of an
// odd number shares it with its own next block. What rounding carries from
// one to the other is of the size of what it does to each alone: about
// 2e-16 log2(N) times the Euclidean norm of the taps times the peak of both.
func (f *FIR) Kernel(channels int) Kernel {
	checkChannels(channels)
	if f.spectrum == nil {
		return newDirect(f.taps, channels)
	}
	return newOverlapSave(f, channels)
}
