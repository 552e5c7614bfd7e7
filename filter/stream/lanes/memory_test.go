package lanes

import (
	"math"
	"slices"
	"sync"
	"testing"

	"fettle/filter/stream/machine"
)

// guards is how many values lie on either side of guarded memory: more than the
// longest vector.
const guards = 32

func guarded(guard float64, s []float64) (all, inside []float64) {
	g := slices.Repeat([]float64{guard}, guards)
	all = slices.Concat(g, s, g)
	return all, all[guards : guards+len(s)]
}

// TestConvolveKeepsToItsMemory: NaN round all that is read does not get in, and
// finite values round what is written stay. Scratch may hold anything.
func TestConvolveKeepsToItsMemory(t *testing.T) {
	atEachSize(t, func(t *testing.T, k machine.Kernel, size int) {
		p := New(noise(80, size/4+1), size, k)
		re, im := noise(6, size), noise(7, size)
		wantRe, wantIm := convolved(p, re, im)
		_, poisonedRe := guarded(math.NaN(), re)
		_, poisonedIm := guarded(math.NaN(), im)
		allRe, yre := guarded(0.25, re)
		allIm, yim := guarded(0.25, im)
		s := p.Scratch()
		dirty, inside := guarded(0.25, s.vector)
		s.vector = inside
		for i := range s.vector {
			s.vector[i] = math.NaN()
		}
		p.Convolve(yre, yim, poisonedRe, poisonedIm, s)
		sameGuarded(t, "real part", allRe, wantRe)
		sameGuarded(t, "imaginary part", allIm, wantIm)
		if guard := append(dirty[:guards:guards], dirty[len(dirty)-guards:]...); slices.Max(guard) != 0.25 || slices.Min(guard) != 0.25 {
			t.Error("something was written outside the scratch")
		}
	})
}

func sameGuarded(t *testing.T, what string, all, want []float64) {
	t.Helper()
	allWant, _ := guarded(0.25, want)
	sameBits(t, what, all, allWant)
}

// TestAlignmentIsNoMatter: at any place in memory the bits are the same.
func TestAlignmentIsNoMatter(t *testing.T) {
	atEachKernel(t, func(t *testing.T, k machine.Kernel) {
		const size = 512
		p := New(noise(81, 100), size, k)
		re, im := noise(8, size), noise(9, size)
		wantRe, wantIm := convolved(p, re, im)
		room := make([]float64, 5*size+8) // the scratch takes 2*size, wherever it begins
		for shift := range 8 {
			x := room[shift:]
			copy(x, re)
			copy(x[size+1:], im)
			s := p.Scratch()
			if s.vector != nil {
				s.vector = x[3*size:]
			}
			p.Convolve(x[:size], x[size+1:][:size], x[:size], x[size+1:][:size], s)
			sameBits(t, "real part", x[:size], wantRe)
			sameBits(t, "imaginary part", x[size+1:][:size], wantIm)
		}
	})
}

func TestConcurrentUse(t *testing.T) {
	atEachKernel(t, func(t *testing.T, k machine.Kernel) {
		p := New(noise(82, 1000), 4096, k)
		re, im := noise(8, 4096), noise(9, 4096)
		wantRe, wantIm := convolved(p, re, im)
		var group sync.WaitGroup
		for range 4 {
			group.Go(func() {
				for range 4 {
					if yre, yim := convolved(p, re, im); !slices.Equal(yre, wantRe) || !slices.Equal(yim, wantIm) {
						t.Error("a call beside others gives other values")
					}
				}
			})
		}
		group.Wait()
	})
}

func TestNoAllocations(t *testing.T) {
	atEachKernel(t, func(t *testing.T, k machine.Kernel) {
		const size = 32768
		p := New(noise(83, 1000), size, k)
		x, y, s := noise(8, size), noise(9, size), p.Scratch()
		if n := testing.AllocsPerRun(10, func() { p.Convolve(x, y, x, y, s) }); n != 0 {
			t.Errorf("%v allocations a block, want none", n)
		}
	})
}
