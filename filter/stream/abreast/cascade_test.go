package abreast

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"

	"fettle/filter/response"
	"fettle/filter/stream/machine"
)

// atEachKernel runs a test for every kernel that runs here.
func atEachKernel(t *testing.T, test func(t *testing.T, k machine.Kernel)) {
	for _, k := range machine.Available() {
		t.Run(k.String(), func(t *testing.T) { test(t, k) })
	}
}

// TestEverySectionOnEveryChannelOnce: a cascade of gains multiplies by all of
// them, whatever the numbers of sections and channels.
func TestEverySectionOnEveryChannelOnce(t *testing.T) {
	atEachKernel(t, func(t *testing.T, kernel machine.Kernel) {
		for count := range 40 {
			gain, sections := 1.0, make([]response.Section, count)
			for i := range sections {
				sections[i].B0 = 1 + float64(i%3)
				gain *= sections[i].B0
			}
			for channels := 1; channels <= 7; channels++ {
				k := New(sections, channels, kernel)
				y, x := planes(channels, 9), planes(channels, 9)
				for c := range x {
					fill(x[c], float64(c+1))
				}
				k.Process(y, x)
				for c := range y {
					want := make([]float64, 9)
					fill(want, gain*float64(c+1))
					sameBits(t, fmt.Sprintf("%d sections, channel %d of %d", count, c, channels), y[c], want)
				}
			}
		}
	})
}

// TestPlan: the smallest shape that holds the sections left, or the largest.
func TestPlan(t *testing.T) {
	shapes := []shape{{2, 1, nil}, {4, 1, nil}, {8, 1, nil}, {1, 2, nil}, {2, 2, nil}, {4, 2, nil}}
	for _, c := range []struct {
		sections, channels int
		want               []shape
	}{
		{0, 3, nil},
		{1, 1, shapes[0:1]},
		{3, 1, shapes[1:2]},
		{13, 1, []shape{shapes[2], shapes[2]}},
		{9, 1, []shape{shapes[2], shapes[0]}},
		{1, 2, shapes[3:4]},
		{7, 2, []shape{shapes[5], shapes[5]}},
		{6, 3, []shape{shapes[5], shapes[4], shapes[2]}},
		{1, 4, []shape{shapes[3], shapes[3]}},
	} {
		var got []shape
		for _, p := range plan(make([]response.Section, c.sections), c.channels, shapes) {
			got = append(got, p.shape)
		}
		if !slices.EqualFunc(got, c.want, func(a, b shape) bool { return a.sections == b.sections && a.channels == b.channels }) {
			t.Errorf("%d sections on %d channels: %v, want %v", c.sections, c.channels, got, c.want)
		}
	}
}

// TestShapesAreInOrder is what plan relies on, and that there is one for every
// number of channels it asks for.
func TestShapesAreInOrder(t *testing.T) {
	atEachKernel(t, func(t *testing.T, k machine.Kernel) {
		for channels := 1; channels <= 2; channels++ {
			var sections []int
			for _, s := range shapes(k) {
				if s.channels == channels {
					sections = append(sections, s.sections)
				}
			}
			if len(sections) == 0 || !slices.IsSorted(sections) {
				t.Errorf("%d channels: sections %v", channels, sections)
			}
		}
	})
}

// TestSplits: calls of any length give the same bits, in place too, across the
// stretches and periods, after Reset as at first.
func TestSplits(t *testing.T) {
	atEachKernel(t, func(t *testing.T, kernel machine.Kernel) {
		k := New(resonances(7, 7), 3, kernel)
		for _, size := range []float64{1, quietest} {
			x := noise(8, 3, 2*stretch+100, size)
			want := planes(3, len(x[0]))
			k.Reset()
			k.Process(want, x)
			for _, length := range []int{5, Period - 3, stretch + 50, 0} {
				k.Reset()
				y := planes(3, len(x[0]))
				for c := range y {
					copy(y[c], x[c])
				}
				next := pieces(length)
				for from := 0; from < len(x[0]); {
					to := min(len(x[0]), from+next())
					part := [][]float64{y[0][from:to], y[1][from:to], y[2][from:to]}
					k.Process(part, part)
					k.Process(planes(3, 0), planes(3, 0))
					from = to
				}
				for c := range y {
					sameBits(t, fmt.Sprintf("%g loud, pieces of %d, channel %d", size, length, c), y[c], want[c])
				}
			}
		}
	})
}

// TestFallsSilent: the states of a section that has decayed are zero, not small.
func TestFallsSilent(t *testing.T) {
	atEachKernel(t, func(t *testing.T, kernel machine.Kernel) {
		k := New([]response.Section{{B0: 1, A1: -1.96, A2: 0.9605}, {B0: 1, B1: -1, A1: -0.5}}, 3, kernel)
		x := planes(3, 20*Period)
		for c := range x {
			x[c][0] = 1
		}
		k.Process(x, x)
		for _, p := range k.passes {
			for _, s := range p.states() {
				if s != 0 {
					t.Errorf("%g is left of an impulse", s)
				}
			}
		}
	})
}

// TestNaNStaysInItsChannel and does not go with Reset undone.
func TestNaNStaysInItsChannel(t *testing.T) {
	atEachKernel(t, func(t *testing.T, kernel machine.Kernel) {
		for _, bad := range []float64{math.NaN(), math.Inf(1)} {
			k := New(resonances(9, 5), 4, kernel)
			x := noise(10, 4, 1000, 1)
			want := planes(4, 1000)
			k.Process(want, x)
			k.Reset()
			y := planes(4, 1000)
			x[1][300] = bad
			k.Process(y, x)
			for _, c := range []int{0, 2, 3} {
				sameBits(t, fmt.Sprintf("channel %d", c), y[c], want[c])
			}
			sameBits(t, "before it", y[1][:300], want[1][:300])
			if !math.IsNaN(y[1][999]) {
				t.Errorf("%g in, %g out at the end of its channel", bad, y[1][999])
			}
			x[1][300] = 0
			k.Reset()
			k.Process(y, x)
			if !(math.Abs(y[1][999]) < 100) {
				t.Errorf("after Reset: %g", y[1][999])
			}
		}
	})
}

func TestProcessDoesNotAllocate(t *testing.T) {
	atEachKernel(t, func(t *testing.T, kernel machine.Kernel) {
		k := New(resonances(11, 7), 3, kernel)
		x := noise(12, 3, 1000, 1)
		if got := testing.AllocsPerRun(10, func() { k.Process(x, x) }); got != 0 {
			t.Errorf("%g allocations a call, want none", got)
		}
	})
}

func TestMisusePanics(t *testing.T) {
	for says, call := range map[string]func(){
		"0 channels":    func() { New(nil, 0, machine.Portable) },
		"does not run":  func() { New(nil, 1, machine.Kernel(7)) },
		"take one of p": func() { New(nil, 1, -1) },
	} {
		func() {
			defer func() {
				if said, _ := recover().(string); !strings.Contains(said, says) {
					t.Errorf("panic %q, want one with %q", said, says)
				}
			}()
			call()
		}()
	}
}
