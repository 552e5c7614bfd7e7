package stream

import (
	"fmt"
	"math"
	"math/big"
	"slices"
	"testing"

	"fettle/filter/response"
	"fettle/filter/stream/machine"
)

type newCascade func(sections []response.Section, channels int) *Cascade

// onEachMachineKernel runs a test for every kernel that runs here.
func onEachMachineKernel(t *testing.T, test func(t *testing.T, cascade newCascade)) {
	for _, kernel := range machine.Available() {
		t.Run(kernel.String(), func(t *testing.T) {
			test(t, func(sections []response.Section, channels int) *Cascade {
				return NewCascade(sections, channels, kernel)
			})
		})
	}
}

// precision of the reference, in bits.
const precision = 200

func exactly(v float64) *big.Float { return new(big.Float).SetPrec(precision).SetFloat64(v) }

// slowCascade is the difference equation of each section (direct form I) in
// numbers of 200 bits.
func slowCascade(sections []response.Section, x []float64) []float64 {
	signal := make([]*big.Float, len(x))
	for i, v := range x {
		signal[i] = exactly(v)
	}
	for _, s := range sections {
		signal = slowSection(s, signal)
	}
	y := make([]float64, len(x))
	for i, v := range signal {
		y[i], _ = v.Float64()
	}
	return y
}

func slowSection(s response.Section, x []*big.Float) []*big.Float {
	forward := []*big.Float{exactly(s.B0), exactly(s.B1), exactly(s.B2)}
	back := []*big.Float{exactly(0), exactly(-s.A1), exactly(-s.A2)}
	y := make([]*big.Float, len(x))
	product := exactly(0)
	for n := range x {
		y[n] = exactly(0)
		for k := range min(3, n+1) {
			y[n].Add(y[n], product.Mul(forward[k], x[n-k]))
			if k > 0 {
				y[n].Add(y[n], product.Mul(back[k], y[n-k]))
			}
		}
	}
	return y
}

// cascadeError allows what rounding may do: an operation in a section adds at
// most eps/2 of the largest value about, which is near the input's peak for
// the sections used here; four of them a sample reach the output through 1/A
// and the sections after it, as noise, so by the Euclidean norm of that
// response. A factor of 8 covers coefficients up to 2, values above the peak
// and the largest of many samples.
func cascadeError(sections []response.Section) func(peak float64) float64 {
	noise := 0.0
	for i, s := range sections {
		noisy := append([]response.Section{{B0: 1, A1: s.A1, A2: s.A2}}, sections[i+1:]...)
		k := NewCascade(noisy, 1, machine.Best())
		noise += norm(run(k, impulse(0, k.Tail()+1)))
	}
	return func(peak float64) float64 { return 8 * eps * noise * peak }
}

func TestCascadeAgainstExactRecursion(t *testing.T) {
	for name, sections := range map[string][]response.Section{
		"20 Hz high-pass at 192 kHz, order 8": slices.Repeat([]response.Section{highpass(20./192000, 0.7)}, 4),
		"20 Hz low-pass at 192 kHz":           {lowpass(20./192000, 0.7)},
		"hum at 48 kHz":                       {notch(50./48000, 25), notch(100./48000, 50), notch(150./48000, 75)},
		"first order":                         {{B0: 0.1, A1: -0.9}},
	} {
		x := noise(7, 4000)
		want, tol := slowCascade(sections, x), cascadeError(sections)(peak(x))
		onEachMachineKernel(t, func(t *testing.T, cascade newCascade) {
			got := run(cascade(sections, 1), x)
			compare(t, name, got, want, tol)
			t.Logf("%s: off by %.3g, allowed %.3g", name, worst(got, want), tol)
		})
	}
}

func TestCascadeKernels(t *testing.T) {
	sections := []response.Section{
		lowpass(0.2, 1), allpass(0.05, 0.7), bandpass(0.1, 0.5), highpass(0.01, 0.5), notch(0.1, 5),
	}
	onEachMachineKernel(t, func(t *testing.T, cascade newCascade) {
		testKernel(t, func(channels int) Kernel { return cascade(sections, channels) },
			func(x []float64) []float64 { return slowCascade(sections, x) }, cascadeError(sections))
	})
}

func TestCascadeIdentityIsExact(t *testing.T) {
	x := noise(8, 1000)
	onEachMachineKernel(t, func(t *testing.T, cascade newCascade) {
		for count := range 4 {
			compare(t, fmt.Sprintf("%d identities", count), run(cascade(slices.Repeat([]response.Section{{B0: 1}}, count), 1), x), x, 0)
		}
	})
}

// TestCascadeFallsSilent: a 70 Hz high-pass at 48 kHz decays by a factor e in
// 1/(2 pi 70 0.7) s = 156 samples, so from 1 to 1e-30 in 10800.
func TestCascadeFallsSilent(t *testing.T) {
	onEachMachineKernel(t, func(t *testing.T, cascade newCascade) {
		k := cascade([]response.Section{highpass(70./48000, 0.7), highpass(70./48000, 0.7)}, 2)
		x := [][]float64{impulse(0, 16384), impulse(0, 16384)}
		k.Process(x, x)
		if x[0][9000] == 0 {
			t.Error("silent before its time, at sample 9000")
		}
		compare(t, "the end", x[1][16000:], make([]float64, 384), 0)
	})
}

// quiet is below what states are set to zero at.
const quiet = 1e-30

// TestCascadeFlushesByItsOwnBlocks: with input so quiet that states are set to
// zero all the time, the output shows when that happens, and that must depend
// neither on the calls nor on what was there before Reset.
func TestCascadeFlushesByItsOwnBlocks(t *testing.T) {
	sections := []response.Section{lowpass(0.01, 0.7), lowpass(0.02, 0.7)}
	x := noisePlanes(9, 3, 10*cascadeBlock+5)
	for _, v := range x {
		for i := range v {
			v[i] *= quiet
		}
	}
	onEachMachineKernel(t, func(t *testing.T, cascade newCascade) {
		k := cascade(sections, 3)
		y := planes(3, len(x[0]))
		k.Process(y, x)
		for c := range y {
			if want := slowCascade(sections, x[c]); !(worst(y[c], want) > 1e-3*quiet) {
				t.Error("the input is too loud for this test: nothing was set to zero")
			}
		}
		testSplits(t, k, x, y)
	})
}

func TestCascadeTail(t *testing.T) {
	shapes := map[string]func(f, q float64) response.Section{
		"low-pass": lowpass, "high-pass": highpass, "notch": notch, "band-pass": bandpass, "all-pass": allpass,
	}
	for name, shape := range shapes {
		for _, f := range []float64{0.0005, 0.01, 0.2, 0.45} {
			for _, q := range []float64{0.3, 0.5, 0.7, 10} {
				for _, count := range []int{1, 2, 8} {
					checkTail(t, name, slices.Repeat([]response.Section{shape(f, q)}, count))
				}
			}
		}
	}
	var hum []response.Section
	for i := 1.0; i <= 16; i++ {
		hum = append(hum, notch(50*i/48000, 25*i))
	}
	checkTail(t, "hum", hum)
	checkTail(t, "close resonances", []response.Section{bandpass(0.01, 100), bandpass(0.0101, 100), lowpass(0.3, 0.5)})
	checkTail(t, "real poles apart", []response.Section{{B0: 1, A1: -1.4, A2: 0.45}})
}

// checkTail runs the impulse response to twice its tail and finds the last
// sample that is not below 1e-15 of the peak. The estimate may be up to three
// times that: most are within 1.5, but many zeros close to many poles take
// more off the response than off the largest gain on a circle.
func checkTail(t *testing.T, name string, sections []response.Section) {
	k := NewCascade(sections, 1, machine.Best())
	h := run(k, impulse(0, 2*k.Tail()+10))
	level, last := 1e-15*peak(h), 0
	for n, v := range h {
		if !(math.Abs(v) < level) {
			last = n
		}
	}
	if !(k.Tail() >= last && k.Tail() <= 3*last+10) {
		t.Errorf("%s, %d sections from %+v: tail %d, measured %d", name, len(sections), sections[0], k.Tail(), last)
	}
}

func TestCascadeTailWithoutPoles(t *testing.T) {
	for _, c := range []struct {
		sections []response.Section
		want     int
	}{
		{nil, 0},
		{[]response.Section{{B0: 2}}, 0},
		{[]response.Section{{B0: 2, B1: 1}}, 1},
		{[]response.Section{{B0: 2, B1: 1}, {B0: 1, B2: 1}}, 3},
		{[]response.Section{{A1: -0.5}}, 0},
	} {
		if got := NewCascade(c.sections, 1, machine.Best()).Tail(); got != c.want {
			t.Errorf("%+v: tail %d, want %d", c.sections, got, c.want)
		}
	}
}
