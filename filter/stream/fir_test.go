package stream

import (
	"fmt"
	"math/rand/v2"
	"slices"
	"sync"
	"testing"

	"fettle/filter/stream/lanes"
	"fettle/filter/stream/machine"

	"pgregory.net/rapid"
)

var tapCounts = []int{1, 2, 3, 31, 64, 65, 255, 1024, 4095, 4096, 16383}

// TestFIRAgainstDirect compares odd input lengths from one to three periods
// with the direct convolution, at the edges of the hops and at random.
func TestFIRAgainstDirect(t *testing.T) {
	for _, taps := range tapCounts {
		t.Run(fmt.Sprint(taps), func(t *testing.T) {
			h := noise(20, taps)
			k := NewFIR(h).Kernel(1, Anything())
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
			for _, at := range edges(f, channels) {
				x := planes(channels, at+taps+3)
				x[channels-1][at] = 1
				want := slices.Concat(make([]float64, at), h, make([]float64, 3))
				got := runChannels(f.Kernel(channels, Anything()), x)[channels-1]
				compare(t, fmt.Sprintf("%d taps, %d channels, impulse at %d", taps, channels, at), got, want, blockError(h)(1))
			}
		}
	}
}

// edges are round the ends of the hops and of the block, and of what is summed
// directly at a time.
func edges(f *FIR, channels int) []int {
	ends := []int{directChunk}
	if size := blockSize(f.Taps(), channels, Anything()); size > 0 {
		hop := size - f.Taps() + 1
		ends = []int{hop, 2 * hop, 3 * hop, size}
	}
	at := []int{0, 1}
	for _, end := range ends {
		at = append(at, end-1, end, end+1)
	}
	return at
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
		k := NewFIR(h).Kernel(channels, Anything())
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

// TestFIRBlockSizeDoesNotMatter compares direct summation with blocks of all
// sizes.
func TestFIRBlockSizeDoesNotMatter(t *testing.T) {
	h, x := noise(24, 250), noise(25, 20000)
	f := NewFIR(h)
	want := run(f.kernel(1, Anything(), 0), x)
	for size := lanes.MinSize; size <= 1<<18; size *= 2 {
		// Larger blocks have more levels, by a factor below two.
		got := run(f.kernel(1, Anything(), size), x)
		compare(t, fmt.Sprintf("blocks of %d", size), got, want, 2*blockError(h)(peak(x)))
	}
}

// TestHopsInAnyOrder: the same bits as of the kernel, whoever filters which period
// when.
func TestHopsInAnyOrder(t *testing.T) {
	f := NewFIR(noise(40, 1000))
	for _, kernel := range machine.Available() {
		for _, channels := range []int{1, 2, 3, 5} {
			run := Run{-1, kernel}
			k := f.Kernel(channels, run)
			h := f.Hops(channels, run)
			x := noisePlanes(41, channels, 6*h.Hop())
			want := runChannels(k, x)
			got := filterInAnyOrder(h, x)
			for c := range got {
				compare(t, fmt.Sprintf("%v, channel %d of %d", kernel, c, channels), got[c], want[c], 0)
			}
		}
	}
	if h := NewFIR([]float64{1}).Hops(2, Anything()); h != nil {
		t.Errorf("hops of %d where a single tap is summed directly", h.Hop())
	}
}

// filterInAnyOrder filters signals of whole periods, the last period first, each on
// a goroutine of its own.
func filterInAnyOrder(h *Hops, x [][]float64) [][]float64 {
	var blocks [][][]float64
	for from := 0; from < len(x[0]); from += h.Hop() {
		block := planes(len(x), h.History()+h.Hop())
		for c := range block {
			before := min(from, h.History())
			copy(block[c][h.History()-before:], x[c][from-before:from+h.Hop()])
		}
		blocks = append(blocks, block)
	}
	var wait sync.WaitGroup
	for at := len(blocks) - h.Period(); at >= 0; at -= h.Period() {
		wait.Go(func() { h.Filter(blocks[at:at+h.Period()], h.Scratch()) })
	}
	wait.Wait()
	y := make([][]float64, len(x))
	for _, block := range blocks {
		for c := range y {
			y[c] = append(y[c], block[c][h.History():]...)
		}
	}
	return y
}

func TestFIRIsShared(t *testing.T) {
	h, x := noise(26, 300), noise(27, 10000)
	f := NewFIR(h)
	want := run(f.Kernel(1, Anything()), x)
	h[0] = 5 // the filter has a copy
	var wait sync.WaitGroup
	for range 4 {
		wait.Go(func() { compare(t, "at the same time", run(f.Kernel(1, Anything()), x), want, 0) })
	}
	wait.Wait()
}

// TestFIRSizes: a period is one hop for an even number of channels and two for an
// odd one.
func TestFIRSizes(t *testing.T) {
	f := NewFIR(noise(28, 4095))
	hop := blockSize(4095, 2, Anything()) - 4094
	for _, c := range []struct{ channels, hops int }{{1, 2}, {2, 1}, {3, 2}, {6, 1}} {
		k := f.Kernel(c.channels, Anything())
		if k.Tail() != 4094 || k.Delay() != c.hops*hop {
			t.Errorf("%d channels: tail %d and delay %d, want 4094 and %d", c.channels, k.Tail(), k.Delay(), c.hops*hop)
		}
	}
	if f.Taps() != 4095 {
		t.Errorf("%d taps, want 4095", f.Taps())
	}
}
