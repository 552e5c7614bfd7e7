package stream

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"fettle/filter/response"
	"fettle/filter/stream/machine"
)

// eps is the distance from 1 to the next float64.
const eps = 0x1p-52

// blockError is what the transforms may add to a sample: eps log2 N |h| peak,
// |h| being the Euclidean norm of the taps and peak the largest input of either
// signal in the block. By Higham, "Accuracy and Stability of Numerical
// Algorithms", 2nd ed., theorem 24.2, each of the log2 N levels of a transform
// adds a relative error of a few eps to the norm of the block. Rounding being as
// good as random, levels add up as their square root (Schatzman, "Accuracy of
// the discrete Fourier transform and the fast Fourier transform", 1996), and a
// sample gets 1/sqrt(N) of the error's norm, which for taps without structure
// is that of the output: |h| times the norm of the block, and that is at most
// sqrt(N) peak. The other sqrt(log2 N) is for the largest of N samples.
func blockError(taps []float64) func(peak float64) float64 {
	levels := math.Log2(float64(max(blockSize(len(taps), 2, Anything()), 32)))
	return func(peak float64) float64 { return eps * levels * norm(taps) * peak }
}

func TestKernels(t *testing.T) {
	for _, taps := range []int{1, 2, 3, 24, 25, 100, 300} {
		h := noise(3, taps)
		f := NewFIR(h)
		for _, kernel := range machine.Available() {
			t.Run(fmt.Sprintf("FIR of %d, %v", taps, kernel), func(t *testing.T) {
				testKernel(t, func(channels int) Kernel { return f.kernel(channels, Run{-1, kernel}, smallBlock(taps)) },
					func(x []float64) []float64 { return slowFIR(h, x) }, blockError(h))
			})
		}
	}
	for _, sections := range [][]response.Section{
		{},
		{lowpass(0.1, 0.7)},
		{highpass(0.01, 0.5), notch(0.1, 5)},
		{lowpass(0.2, 1), allpass(0.05, 0.7), bandpass(0.1, 0.5)},
	} {
		t.Run(fmt.Sprintf("Cascade of %d", len(sections)), func(t *testing.T) {
			testKernel(t, func(channels int) Kernel { return NewCascade(sections, channels, machine.Best()) },
				func(x []float64) []float64 { return slowCascade(sections, x) }, cascadeError(sections))
		})
	}
	for _, samples := range []int{0, 1, 300} {
		t.Run(fmt.Sprintf("Delay of %d", samples), func(t *testing.T) {
			testKernel(t, func(channels int) Kernel { return NewDelay(samples, channels) },
				func(x []float64) []float64 { return slowDelay(samples, x) }, exact)
		})
	}
	t.Run("Series of none", func(t *testing.T) {
		testKernel(t, func(int) Kernel { return Series() }, func(x []float64) []float64 { return x }, exact)
	})
	t.Run("Series of four", testSeries)
}

// smallBlock keeps tests short.
func smallBlock(taps int) int {
	if taps <= 24 {
		return 0
	}
	return 512
}

func testSeries(t *testing.T) {
	h, g := noise(4, 70), noise(5, 40)
	f, e := NewFIR(h), NewFIR(g)
	sections := []response.Section{lowpass(0.1, 0.7)}
	testKernel(t, func(channels int) Kernel {
		return Series(f.Kernel(channels, Anything()), NewDelay(5, channels), NewCascade(sections, channels, machine.Best()), e.Kernel(channels, Anything()))
	}, func(x []float64) []float64 {
		return slowFIR(g, slowCascade(sections, slowDelay(5, slowFIR(h, x))))
	}, func(peak float64) float64 {
		// The first error goes through the second filter; |g|_1 bounds its gain.
		gain := math.Sqrt(float64(len(g))) * norm(g)
		return blockError(h)(peak)*gain + (cascadeError(sections)(peak)+blockError(g)(peak))*norm(h)*math.Sqrt(float64(len(h)))*gain
	})
}

func TestSeriesAddsDelaysAndTails(t *testing.T) {
	kernels := []Kernel{NewFIR(noise(4, 70)).Kernel(1, Anything()), NewDelay(5, 1), NewFIR(noise(5, 40)).Kernel(1, Anything())}
	s := Series(kernels...)
	kernels[1] = NewDelay(1000, 1) // the series has its own list
	if want := 69 + 5 + 39; s.Tail() != want {
		t.Errorf("tail %d, want %d", s.Tail(), want)
	}
	if want := kernels[0].Delay() + kernels[2].Delay(); s.Delay() != want {
		t.Errorf("delay %d, want %d", s.Delay(), want)
	}
	if s := Series(); s.Tail() != 0 || s.Delay() != 0 {
		t.Errorf("of nothing: tail %d and delay %d, want 0 and 0", s.Tail(), s.Delay())
	}
}

func exact(float64) float64 { return 0 }

func slowDelay(samples int, x []float64) []float64 {
	return append(make([]float64, samples), x...)[:len(x)]
}

// testKernel holds a kernel to what Kernel promises. slow is the filter on
// one whole channel, its own output without any block delay; bound gives the
// error allowed where no input is larger than peak.
func testKernel(t *testing.T, newKernel func(channels int) Kernel, slow func(x []float64) []float64, bound func(peak float64) float64) {
	for _, channels := range []int{1, 2, 3, 5} {
		k := newKernel(channels)
		frames := 3*stride(k) + 5
		x := noisePlanes(uint64(channels), channels, frames)
		want := expected(k, x, slow)
		t.Run(fmt.Sprintf("channels=%d", channels), func(t *testing.T) {
			y := testOneCall(t, k, x, want, bound)
			testSplits(t, k, x, y)
			testInPlace(t, k, x, y)
			testChannelsApart(t, k, channels, frames, slow, bound)
		})
	}
}

// stride is the block of a kernel, or a length of the same kind if it has none.
func stride(k Kernel) int {
	if k.Delay() > 0 {
		return k.Delay()
	}
	return cascadeBlock
}

// expected is what Process should give: the filter's output after Delay.
func expected(k Kernel, x [][]float64, slow func([]float64) []float64) [][]float64 {
	want := make([][]float64, len(x))
	for c := range x {
		want[c] = slowDelay(k.Delay(), slow(x[c]))
	}
	return want
}

func testOneCall(t *testing.T, k Kernel, x, want [][]float64, bound func(float64) float64) [][]float64 {
	src, dst := guard(x, math.NaN()), guard(planes(len(x), len(x[0])), 0.5)
	k.Process(dst.inner, src.inner)
	src.check(t, "the input", x)
	dst.check(t, "the output", dst.inner)
	for c := range x {
		compare(t, fmt.Sprintf("channel %d", c), dst.inner[c], want[c], bound(loudest(x)))
	}
	return dst.inner
}

func loudest(x [][]float64) float64 {
	top := 0.0
	for _, v := range x {
		top = max(top, peak(v))
	}
	return top
}

// testSplits resets the kernel and feeds it in pieces.
func testSplits(t *testing.T, k Kernel, x, want [][]float64) {
	r := rand.New(rand.NewPCG(6, 0))
	b := stride(k)
	for name, next := range map[string]func() int{
		"whole":     func() int { return len(x[0]) },
		"1":         func() int { return 1 },
		"7":         func() int { return 7 },
		"block-1":   func() int { return b - 1 },
		"block":     func() int { return b },
		"block+1":   func() int { return b + 1 },
		"random":    func() int { return r.IntN(b + b/2) },
		"with none": func() int { return r.IntN(2) * 50 },
	} {
		k.Reset()
		y := planes(len(x), len(x[0]))
		for from := 0; from < len(x[0]); {
			to := min(len(x[0]), from+next())
			k.Process(cut(y, from, to), cut(x, from, to))
			from = to
		}
		for c := range y {
			compare(t, fmt.Sprintf("in steps of %s, channel %d", name, c), y[c], want[c], 0)
		}
	}
}

func testInPlace(t *testing.T, k Kernel, x, want [][]float64) {
	k.Reset()
	y := planes(len(x), len(x[0]))
	copyPlanes(y, x)
	k.Process(y, y)
	for c := range y {
		compare(t, fmt.Sprintf("in place, channel %d", c), y[c], want[c], 0)
	}
}

// testChannelsApart sends an impulse through each channel and looks for it in
// all of them.
func testChannelsApart(t *testing.T, k Kernel, channels, frames int, slow func([]float64) []float64, bound func(float64) float64) {
	for loud := range channels {
		x := planes(channels, frames)
		x[loud][frames/5] = 1
		want := expected(k, x, slow)
		k.Reset()
		k.Process(x, x)
		for c := range x {
			compare(t, fmt.Sprintf("impulse in channel %d, channel %d", loud, c), x[c], want[c], bound(1))
		}
	}
}

func cut(x [][]float64, from, to int) [][]float64 {
	part := make([][]float64, len(x))
	for c := range x {
		part[c] = x[c][from:to]
	}
	return part
}

// guarded is planes with a strip of one value before and after each.
type guarded struct {
	outer, inner [][]float64
	value        float64
}

const strip = 16

func guard(x [][]float64, value float64) guarded {
	g := guarded{value: value}
	for _, v := range x {
		outer := make([]float64, len(v)+2*strip)
		for i := range outer {
			outer[i] = value
		}
		copy(outer[strip:], v)
		g.outer = append(g.outer, outer)
		g.inner = append(g.inner, outer[strip:strip+len(v)])
	}
	return g
}

// check fails if the strips have changed, or what is between them is not want.
func (g guarded) check(t *testing.T, what string, want [][]float64) {
	t.Helper()
	for c, outer := range g.outer {
		compare(t, what+" kept", g.inner[c], want[c], 0)
		for i := range strip {
			for _, v := range []float64{outer[i], outer[len(outer)-1-i]} {
				if math.Float64bits(v) != math.Float64bits(g.value) {
					t.Errorf("%s: channel %d has %g written outside it", what, c, v)
				}
			}
		}
	}
}
