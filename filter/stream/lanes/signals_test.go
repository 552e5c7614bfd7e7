package lanes

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"pgregory.net/rapid"

	"fettle/filter/stream/machine"
)

// eps is the distance from 1 to the next float64, twice the largest relative
// rounding error.
const eps = 0x1p-52

// noise returns n samples evenly spread over -1 to 1, the same for a seed.
func noise(seed uint64, n int) []float64 {
	r := rand.New(rand.NewPCG(seed, 0))
	x := make([]float64, n)
	for i := range x {
		x[i] = 2*r.Float64() - 1
	}
	return x
}

func impulse(at, n int) []float64 {
	x := make([]float64, n)
	x[at] = 1
	return x
}

func atEachKernel(t *testing.T, test func(t *testing.T, k machine.Kernel)) {
	for _, k := range machine.Available() {
		t.Run(k.String(), func(t *testing.T) { test(t, k) })
	}
}

// atEachSize runs the test at all sizes up to 65536.
func atEachSize(t *testing.T, test func(t *testing.T, k machine.Kernel, size int)) {
	atEachKernel(t, func(t *testing.T, k machine.Kernel) {
		for size := MinSize; size <= 65536; size *= 2 {
			t.Run(fmt.Sprint(size), func(t *testing.T) { test(t, k, size) })
		}
	})
}

// convolved is what a plan makes of a block.
func convolved(p *Plan, re, im []float64) (yre, yim []float64) {
	yre, yim = make([]float64, p.size), make([]float64, p.size)
	p.Convolve(yre, yim, re, im, p.Scratch())
	return yre, yim
}

// slowCircularAt is sample n of the circular convolution by definition.
func slowCircularAt(taps, x []float64, n int) float64 {
	var y sum
	for k, h := range taps {
		y.addProduct(h, x[(n-k+len(x))%len(x)])
	}
	return y.total
}

// sum is a compensated sum of products (Kahan 1965) that takes in the rounding
// of each product too, so its own error is about one rounding of the total
// however many terms there are, unless they cancel.
type sum struct{ total, lost float64 }

func (s *sum) addProduct(a, b float64) {
	p := a * b
	v := p - (s.lost - math.FMA(a, b, -p))
	next := s.total + v
	s.total, s.lost = next, next-s.total-v
}

// norm is the Euclidean norm.
func norm(x []float64) float64 {
	var square sum
	for _, v := range x {
		square.addProduct(v, v)
	}
	return math.Sqrt(square.total)
}

func peak(x []float64) float64 {
	top := 0.0
	for _, v := range x {
		top = math.Max(top, math.Abs(v)) // a NaN stays
	}
	return top
}

// compare fails unless got is within tol of want at every sample.
func compare(t rapid.TB, what string, got, want []float64, tol float64) {
	t.Helper()
	if len(got) != len(want) {
		t.Fatalf("%s: %d samples, want %d", what, len(got), len(want))
	}
	diff := make([]float64, len(want))
	for i := range diff {
		diff[i] = got[i] - want[i]
	}
	if worst := peak(diff); !(worst <= tol) {
		t.Errorf("%s: off by up to %.3g, allowed %.3g", what, worst, tol)
	}
}

// sameBits fails unless got and want are equal to the bit.
func sameBits(t *testing.T, what string, got, want []float64) {
	t.Helper()
	if len(got) != len(want) {
		t.Fatalf("%s: %d samples, want %d", what, len(got), len(want))
	}
	for i := range got {
		if math.Float64bits(got[i]) != math.Float64bits(want[i]) {
			t.Fatalf("%s: value %d is %v, want %v to the bit", what, i, got[i], want[i])
		}
	}
}
