package stream

import (
	"fmt"
	"math"
	"testing"

	"fettle/filter/response"
	"fettle/filter/stream/machine"
)

// slowForwardBackward is the definition: the cascade over all of x and its
// tail, then over the result backward.
func slowForwardBackward(sections []response.Section, x []float64) []float64 {
	long := append(append([]float64(nil), x...), make([]float64, NewCascade(sections, 1, machine.Best()).Tail())...)
	y := slowCascade(sections, long)
	backwards(long, y)
	y = slowCascade(sections, long)
	backwards(long, y)
	return long[:len(x)]
}

func TestForwardBackward(t *testing.T) {
	for _, sections := range [][]response.Section{
		{},
		{lowpass(0.1, 0.7)},
		{highpass(0.01, 0.5), notch(0.1, 5)},
	} {
		t.Run(fmt.Sprintf("%d sections", len(sections)), func(t *testing.T) {
			testKernel(t, func(channels int) Kernel { return NewForwardBackward(sections, channels, machine.Best()) },
				func(x []float64) []float64 { return slowForwardBackward(sections, x) },
				// What the look-ahead cuts off, and the cascade's own rounding twice.
				func(peak float64) float64 { return peak*cutBackward*2 + 4*cascadeError(sections)(peak) })
		})
	}
}

// The impulse response is the autocorrelation of the cascade's: symmetric, and
// of zero phase.
func TestForwardBackwardIsSymmetric(t *testing.T) {
	sections := []response.Section{highpass(0.02, 0.7)}
	k := NewForwardBackward(sections, 1, machine.Best())
	at := k.lookAhead + 100
	x := make([]float64, at+k.Delay()+at)
	x[at] = 1
	k.Process([][]float64{x}, [][]float64{x})
	centre := at + k.Delay()
	for n := 1; n < at; n++ {
		if d := math.Abs(x[centre+n] - x[centre-n]); !(d <= cutBackward) {
			t.Fatalf("%d samples from the centre the sides differ by %g, allowed %g", n, d, cutBackward)
		}
	}
}
