package stream

import (
	"fmt"
	"math/rand/v2"
	"slices"
	"sync"
	"testing"

	"pgregory.net/rapid"
)

var tapCounts = []int{1, 2, 3, 31, 64, 65, 255, 1024, 4095, 4096, 16383}

// TestFIRAgainstDirect compares odd input lengths from one to three periods
// with the direct convolution, at the edges of the hops and at random.
func TestFIRAgainstDirect(t *testing.T) {
	for _, taps := range tapCounts {
		t.Run(fmt.Sprint(taps), func(t *testing.T) {
			h := noise(20, taps)
			k := NewFIR(h).Kernel(1)
			for periods := 1; periods <= 3; periods++ {
				k.Reset()
				x := noise(uint64(periods), periods*stride(k)-1|1)
				y := run(k, x)
				var got, want []float64
				for _, n := range places(stride(k), len(x)) {
					got, want = append(got, y[n]), append(want, slowFIRAt(h, x, n))
				}
				tol := blockError(h)(peak(x))
				compare(t, fmt.Sprintf("%d samples", len(x)), got, want, tol)
				t.Logf("%d samples: off by %.3g, allowed %.3g", len(x), worst(got, want), tol)
			}
		})
	}
}

// places returns samples round the ends of every half period, and others.
func places(period, length int) []int {
	r := rand.New(rand.NewPCG(21, 0))
	var all []int
	for edge := 0; edge <= length; edge += max(1, period/2) {
		for n := edge - 20; n < edge+20; n++ {
			all = append(all, n)
		}
	}
	for range 200 {
		all = append(all, r.IntN(length))
	}
	return slices.DeleteFunc(all, func(n int) bool { return n < 0 || n >= length })
}

// TestFIRGivesItsTaps sends impulses in at the start, at the edges of hops and
// of blocks and next to them; what comes out is the taps from there on, and
// nothing anywhere else.
func TestFIRGivesItsTaps(t *testing.T) {
	for _, taps := range []int{1, 24, 25, 31, 255, 1024} {
		h := noise(22, taps)
		f := NewFIR(h)
		for _, channels := range []int{1, 2} {
			for _, at := range edges(f) {
				x := planes(channels, at+taps+3)
				x[channels-1][at] = 1
				want := slices.Concat(make([]float64, at), h, make([]float64, 3))
				got := runChannels(f.Kernel(channels), x)[channels-1]
				compare(t, fmt.Sprintf("%d taps, %d channels, impulse at %d", taps, channels, at), got, want, blockError(h)(1))
			}
		}
	}
}

func edges(f *FIR) []int {
	if f.spectrum == nil {
		return []int{0, 1, directChunk - 1, directChunk, directChunk + 1}
	}
	var at []int
	for _, edge := range []int{f.hop(), 2 * f.hop(), 3 * f.hop(), len(f.spectrum)} {
		at = append(at, edge-1, edge, edge+1)
	}
	return append(at, 0, 1)
}

func runChannels(k Kernel, x [][]float64) [][]float64 {
	y := planes(len(x), len(x[0])+k.Delay())
	copyPlanes(y, x)
	k.Process(y, y)
	return cut(y, k.Delay(), len(y[0]))
}

func TestFIRProperty(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		h := noise(rapid.Uint64().Draw(t, "seed"), rapid.IntRange(1, 200).Draw(t, "taps"))
		channels := rapid.IntRange(1, 3).Draw(t, "channels")
		k := NewFIR(h).Kernel(channels)
		frames := rapid.IntRange(0, 3*stride(k)).Draw(t, "frames")
		x := noisePlanes(23, channels, frames)
		want := expected(k, x, func(x []float64) []float64 { return slowFIR(h, x) })
		y := planes(channels, frames)
		for from := 0; from < frames; {
			to := min(frames, from+rapid.IntRange(1, 2*stride(k)).Draw(t, "step"))
			k.Process(cut(y, from, to), cut(x, from, to))
			from = to
		}
		for c := range y {
			compare(t, fmt.Sprintf("channel %d", c), y[c], want[c], blockError(h)(loudest(x)))
		}
	})
}

// TestFIRBlockSizeDoesNotMatter compares the default with other block sizes.
func TestFIRBlockSizeDoesNotMatter(t *testing.T) {
	h, x := noise(24, 250), noise(25, 20000)
	want := run(newFIR(h, 0).Kernel(1), x)
	for size := 1024; size <= 1<<18; size *= 2 {
		got := run(newFIR(h, size).Kernel(1), x)
		// Larger blocks have more levels, by a factor below two.
		compare(t, fmt.Sprintf("blocks of %d", size), got, want, 2*blockError(h)(peak(x)))
	}
}

func TestFIRBlockSize(t *testing.T) {
	for taps := 1; taps <= 1<<20; taps += 1 + taps/50 {
		size := blockSize(taps)
		if taps <= directTaps {
			if size != 0 {
				t.Errorf("%d taps: blocks of %d, want none", taps, size)
			}
			continue
		}
		if size&(size-1) != 0 || size < 4*(taps-1) || size > max(shortestBlock, 8*(taps-1)) {
			t.Errorf("%d taps: blocks of %d, want a power of two of 4 to 8 times the overlap", taps, size)
		}
	}
}

func TestFIRIsShared(t *testing.T) {
	h, x := noise(26, 300), noise(27, 10000)
	f := NewFIR(h)
	want := run(f.Kernel(1), x)
	h[0] = 5 // the filter has a copy
	var wait sync.WaitGroup
	for range 4 {
		wait.Go(func() { compare(t, "at the same time", run(f.Kernel(1), x), want, 0) })
	}
	wait.Wait()
}

func TestFIRSizes(t *testing.T) {
	f := NewFIR(noise(28, 4095))
	even, odd := f.Kernel(2), f.Kernel(3)
	if f.Taps() != 4095 || even.Tail() != 4094 || odd.Tail() != 4094 {
		t.Errorf("taps %d, tails %d and %d, want 4095, 4094 and 4094", f.Taps(), even.Tail(), odd.Tail())
	}
	if even.Delay() != 16384-4094 || odd.Delay() != 2*even.Delay() {
		t.Errorf("delays %d and %d, want 12290 and 24580", even.Delay(), odd.Delay())
	}
}
