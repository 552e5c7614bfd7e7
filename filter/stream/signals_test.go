package stream

import (
	"math"
	"math/rand/v2"

	"fettle/filter/response"

	"pgregory.net/rapid"
)

// noise returns n samples evenly spread over -1 to 1, the same for a seed.
func noise(seed uint64, n int) []float64 {
	r := rand.New(rand.NewPCG(seed, 0))
	x := make([]float64, n)
	for i := range x {
		x[i] = 2*r.Float64() - 1
	}
	return x
}

func noisePlanes(seed uint64, channels, frames int) [][]float64 {
	x := make([][]float64, channels)
	for c := range x {
		x[c] = noise(seed+uint64(c), frames)
	}
	return x
}

func impulse(at, n int) []float64 {
	x := make([]float64, n)
	x[at] = 1
	return x
}

// run puts x through a kernel of one channel and returns the filter's own
// output, as long as x: the delay is taken off, the tail is left out.
func run(k Kernel, x []float64) []float64 {
	padded := make([]float64, len(x)+k.Delay())
	copy(padded, x)
	k.Process([][]float64{padded}, [][]float64{padded})
	return padded[k.Delay():]
}

// slowFIR is the direct convolution.
func slowFIR(taps, x []float64) []float64 {
	y := make([]float64, len(x))
	for n := range y {
		y[n] = slowFIRAt(taps, x, n)
	}
	return y
}

// slowFIRAt is one sample of the direct convolution.
func slowFIRAt(taps, x []float64, n int) float64 {
	var y sum
	for k, h := range taps[:min(len(taps), n+1)] {
		y.addProduct(h, x[n-k])
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

// worst returns the largest |got-want|, NaN if there is one.
func worst(got, want []float64) float64 {
	diff := make([]float64, len(want))
	for i := range diff {
		diff[i] = got[i] - want[i]
	}
	return peak(diff)
}

// compare fails unless got is within tol of want at every sample.
func compare(t rapid.TB, what string, got, want []float64, tol float64) {
	t.Helper()
	if len(got) != len(want) {
		t.Fatalf("%s: %d samples, want %d", what, len(got), len(want))
	}
	if diff := worst(got, want); !(diff <= tol) {
		t.Errorf("%s: off by up to %.3g, allowed %.3g", what, diff, tol)
	}
}

// These are textbook second-order responses by the bilinear transform of the
// analogue prototypes 1/(s^2+s/q+1) and its kin, corner f in cycles a sample
// (Oppenheim and Schafer, 3rd ed., section 7.2.2, with the corner prewarped).

func bilinear(f, q float64) (c float64, norm float64, s response.Section) {
	w := 2 * math.Pi * f
	c, a := math.Cos(w), math.Sin(w)/(2*q)
	return c, 1 + a, response.Section{A1: -2 * c / (1 + a), A2: (1 - a) / (1 + a)}
}

func lowpass(f, q float64) response.Section {
	c, n, s := bilinear(f, q)
	s.B0, s.B1, s.B2 = (1-c)/2/n, (1-c)/n, (1-c)/2/n
	return s
}

func highpass(f, q float64) response.Section {
	c, n, s := bilinear(f, q)
	s.B0, s.B1, s.B2 = (1+c)/2/n, -(1+c)/n, (1+c)/2/n
	return s
}

func notch(f, q float64) response.Section {
	c, n, s := bilinear(f, q)
	s.B0, s.B1, s.B2 = 1/n, -2*c/n, 1/n
	return s
}

func bandpass(f, q float64) response.Section {
	_, n, s := bilinear(f, q)
	s.B0, s.B2 = 1-1/n, 1/n-1
	return s
}

func allpass(f, q float64) response.Section {
	_, _, s := bilinear(f, q)
	s.B0, s.B1, s.B2 = s.A2, s.A1, 1
	return s
}
