package lanes

import (
	"math"
	"slices"
	"sync"
	"testing"

	"fettle/filter/stream/internal/twiddle"
)

// guards is how many values lie on either side of guarded memory: more than the
// longest vector.
const guards = 32

func guarded[T any](guard T, s []T) (all, inside []T) {
	g := slices.Repeat([]T{guard}, guards)
	all = slices.Concat(g, s, g)
	return all, all[guards : guards+len(s)]
}

// TestConvolveKeepsToItsMemory: NaN round all that is read does not get in, and
// finite values round what is written stay.
func TestConvolveKeepsToItsMemory(t *testing.T) {
	nan := complex(math.NaN(), math.NaN())
	atEachSize(t, func(t *testing.T, e engine, size int) {
		plain := newPlan(noise(80, size/4+1), size, e)
		want := plain.noise(6)
		x := slices.Clone(want)
		plain.Convolve(want)

		p := *plain
		_, p.spectrum = guarded(nan, plain.spectrum)
		_, p.factors = guarded(twiddle.Factor{W1: nan, W2: nan, W3: nan}, plain.factors)
		_, poisoned := guarded(math.NaN(), x)
		p.Convolve(poisoned)
		sameBits(t, "among NaN", poisoned, want)
		if !slices.Equal(p.spectrum, plain.spectrum) || !slices.Equal(p.factors, plain.factors) {
			t.Error("the spectrum or the factors were written to")
		}

		all, inside := guarded(0.25, x)
		p.Convolve(inside)
		allWant, _ := guarded(0.25, want)
		sameBits(t, "with its surroundings", all, allWant)
	})
}

// TestAlignmentIsNoMatter: at any place in memory the bits are the same.
func TestAlignmentIsNoMatter(t *testing.T) {
	atEachEngine(t, func(t *testing.T, e engine) {
		p := newPlan(noise(81, 100), 512, e)
		x := p.noise(7)
		want := slices.Clone(x)
		p.Convolve(want)
		room := make([]float64, len(x)+8)
		for shift := range 8 {
			y := room[shift:][:len(x)]
			copy(y, x)
			p.Convolve(y)
			sameBits(t, "shifted", y, want)
		}
	})
}

func TestConcurrentUse(t *testing.T) {
	atEachEngine(t, func(t *testing.T, e engine) {
		p := newPlan(noise(82, 1000), 4096, e)
		want := p.noise(8)
		p.Convolve(want)
		var group sync.WaitGroup
		for range 4 {
			group.Go(func() {
				for range 4 {
					x := p.noise(8)
					p.Convolve(x)
					if !slices.Equal(x, want) {
						t.Error("a call beside others gives other values")
					}
				}
			})
		}
		group.Wait()
	})
}

func TestNoAllocations(t *testing.T) {
	atEachEngine(t, func(t *testing.T, e engine) {
		p := newPlan(noise(83, 1000), 32768, e)
		x, signals := p.Buffer(), planes(2*e.lanes, p.size)
		signals[3] = nil
		if n := testing.AllocsPerRun(10, func() {
			p.Load(x, signals)
			p.Convolve(x)
			p.Store(signals, x)
		}); n != 0 {
			t.Errorf("%v allocations a block, want none", n)
		}
	})
}
