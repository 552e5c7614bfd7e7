package lanes

import (
	"fmt"
	"math"
	"testing"
)

// ramps returns signals whose values name their place: sample k of signal s is
// 2^20 s + k.
func ramps(count, size int) [][]float64 {
	signals := make([][]float64, count)
	for s := range signals {
		for k := range size {
			signals[s] = append(signals[s], float64(s<<20+k))
		}
	}
	return signals
}

func TestLoadLaysSignalsOut(t *testing.T) {
	atEachSize(t, func(t *testing.T, e engine, size int) {
		p := newPlan([]float64{1}, size, e)
		signals := ramps(2*e.lanes, size)
		signals[1] = nil
		x := p.noise(1)
		p.Load(x, signals)
		signals[1] = make([]float64, size)
		for s, want := range signals {
			sameBits(t, fmt.Sprintf("signal %d", s), signal(x, e.lanes, s), want)
		}
	})
}

// TestStoreHandsOutEnds: of any length, with nothing written past it.
func TestStoreHandsOutEnds(t *testing.T) {
	atEachEngine(t, func(t *testing.T, e engine) {
		const size = 1024
		p := newPlan([]float64{1}, size, e)
		x := p.Buffer()
		want := ramps(2*e.lanes, size)
		p.Load(x, want)
		// Round the stretch of 256 points and the four points of a step.
		for _, keep := range []int{0, 1, 3, 4, 5, 255, 256, 257, 258, 513, 768, 1023, 1024} {
			got, all := make([][]float64, 2*e.lanes), make([][]float64, 2*e.lanes)
			for s := range got {
				all[s], got[s] = guarded(0.25, make([]float64, keep))
			}
			got[2] = nil
			p.Store(got, x)
			for s := range got {
				expected, inside := guarded(0.25, make([]float64, keep))
				if s != 2 {
					copy(inside, want[s][size-keep:])
				}
				sameBits(t, fmt.Sprintf("signal %d, %d kept, between guards", s, keep), all[s], expected)
			}
		}
	})
}

func planes(count, size int) [][]float64 {
	p := make([][]float64, count)
	for i := range p {
		p[i] = make([]float64, size)
	}
	return p
}

// TestLoadReadsNoFurther: NaN on both sides of every signal does not get in.
func TestLoadReadsNoFurther(t *testing.T) {
	atEachEngine(t, func(t *testing.T, e engine) {
		const size = 512
		p := newPlan([]float64{1}, size, e)
		want := ramps(2*e.lanes, size)
		var poisoned [][]float64
		for _, s := range want {
			_, inside := guarded(math.NaN(), s)
			poisoned = append(poisoned, inside)
		}
		x := p.Buffer()
		p.Load(x, poisoned)
		for s := range want {
			sameBits(t, fmt.Sprintf("signal %d", s), signal(x, e.lanes, s), want[s])
		}
	})
}
