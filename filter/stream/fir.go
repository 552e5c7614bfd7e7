package stream

import (
	"math"
	"sync"

	"fettle/filter/stream/lanes"
	"fettle/filter/stream/machine"
)

// FIR is a filter of finite impulse response h[0] to h[len-1]:
//
//	y[n] = sum over k of h[k] x[n-k]
//
// It holds what all kernels of one filter share and may be used by any number
// of goroutines.
type FIR struct {
	taps  []float64
	mu    sync.Mutex
	plans map[planKey]*lanes.Plan // made when first asked for
}

type planKey struct {
	size   int
	kernel machine.Kernel
}

// NewFIR returns the filter with the given taps, one or more, of any size and
// sign, which are copied. It panics if there are none.
func NewFIR(taps []float64) *FIR {
	if len(taps) == 0 {
		panic("stream: NewFIR without taps: one or more are needed")
	}
	return &FIR{taps: append([]float64(nil), taps...), plans: map[planKey]*lanes.Plan{}}
}

// plan returns the plan for blocks of size points.
func (f *FIR) plan(size int, kernel machine.Kernel) *lanes.Plan {
	f.mu.Lock()
	defer f.mu.Unlock()
	key := planKey{size, kernel}
	if f.plans[key] == nil {
		f.plans[key] = lanes.New(f.taps, size, kernel)
	}
	return f.plans[key]
}

// Taps returns how many taps there are.
func (f *FIR) Taps() int { return len(f.taps) }

// Operations returns about how many multiplications a sample of one channel
// costs in a long stream with the portable kernel: the taps themselves where they
// are summed directly; else, of a block of N points that gives a hop of two
// signals, two transforms of 3/4 N log4 N complex multiplications and N for the
// spectrum, four real ones each.
func (f *FIR) Operations() float64 {
	n := float64(blockSize(len(f.taps), 2, Run{Frames: -1, Kernel: machine.Portable}))
	if n == 0 {
		return float64(len(f.taps))
	}
	hop := n - float64(len(f.taps)) + 1
	return 4 * n * (2*0.75*math.Log2(n)/2 + 1) / (2 * hop)
}

// Run says how a stream is to be filtered.
type Run struct {
	// Frames is how long the stream is about to be, -1 if that is not known. It
	// decides about blocks, nothing else: the stream may turn out longer.
	Frames int64
	Kernel machine.Kernel
}

// Anything is a run of unknown length with the best kernel.
func Anything() Run { return Run{Frames: -1, Kernel: machine.Best()} }

// Kernel returns a kernel for one stream of so many channels, one or more; it
// panics if there are none or the run's kernel does not run here. Its Tail is
// Taps()-1; its Delay follows from the blocks, the same for all channels.
//
// How it is computed depends on the number of taps, the channels, the run's
// frames and its kernel alone, see blockSize: directly, or by overlap-save in
// blocks of a power of two.
//
// Two channels share a block, as its real and imaginary part; the last of an
// odd number shares it with its own next hop. What rounding carries from
// one to the other is of the size of what it does to each alone: about
// 2e-16 log2(N) times the Euclidean norm of the taps times the peak of both.
func (f *FIR) Kernel(channels int, run Run) Kernel {
	checkChannels(channels)
	return f.kernel(channels, run, blockSize(len(f.taps), channels, run))
}

// kernel is Kernel with a block of size points, 0 for direct summation.
func (f *FIR) kernel(channels int, run Run, size int) Kernel {
	if size == 0 {
		return newDirect(f.taps, channels)
	}
	return newOverlapSave(f.hops(channels, run, size))
}
