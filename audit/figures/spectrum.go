package figures

import (
	"math"

	"fettle/filter/response"
)

// spectrum is a response and its transform on a grid dense enough for every
// integral of the package.
type spectrum struct {
	rate float64
	x    []float64    // the response from its first to its last sample that is not zero
	mid  float64      // index in x that moments are taken about: near the centroid, for precision
	size int          // K, transform length
	step float64      // fs/K, Hz between bins
	h    []complex128 // DFT(x), bins 0..K/2
	nh   []complex128 // DFT((n-mid)·x)
	peak float64      // max |H|² over the grid
	*plans
}

// gridDensity keeps bins 0.1 Hz apart or closer, so that 1/f weights at 20 Hz
// see a smooth function however short the response.
const gridDensity = 10

// newSpectrum transforms x about the index mid; K is at least refine times the
// least allowed: 8 times the length, and ten bins a Hz.
func newSpectrum(x []float64, mid, rate float64, refine int) *spectrum {
	size := refine * fastLength(max(8*len(x), int(math.Ceil(gridDensity*rate))))
	s := &spectrum{rate: rate, x: x, mid: mid, size: size, step: rate / float64(size), plans: newPlans()}
	s.h = s.forward(x, size)
	for _, c := range s.h {
		s.peak = max(s.peak, power(c))
	}
	moment := make([]float64, len(x))
	for n, v := range x {
		moment[n] = (float64(n) - mid) * v
	}
	s.nh = s.forward(moment, size)
	return s
}

// each visits the bins whose weighted sum is the integral over lo..hi in Hz.
func (s *spectrum) each(lo, hi float64, visit func(k int, width float64)) {
	response.EachBin(s.step, lo, hi, visit)
}

// eachPink visits the bins of pink weights.
func (s *spectrum) eachPink(visit func(k int, pink float64)) {
	response.EachPink(s.step, s.rate, visit)
}

// aligned is e^(j2πkt/K): what turns bin k of the transform of x as if x began t samples earlier.
func (s *spectrum) aligned(k int, t float64) complex128 {
	return turn(2 * math.Pi * float64(k) * t / float64(s.size))
}

// resync is how many steps a rotation by repeated multiplication may run before
// it is set right again: its error grows by about 1e-16 a step.
const resync = 512

// transformAt is DFT(x) and DFT((n-mid)·x) at the frequency f in Hz, summed
// directly, four samples to a step of the rotation.
func transformAt(x []float64, mid, f, rate float64) (h, nh complex128) {
	w := -2 * math.Pi * f / rate
	r1, r2, r3, r4 := turn(w), turn(2*w), turn(3*w), turn(4*w)
	fours := len(x) &^ 3
	var z complex128
	for n := 0; n < fours; n += 4 {
		if n%(4*resync) == 0 {
			z = turn(w * float64(n))
		}
		a, b, c, d := x[n], x[n+1], x[n+2], x[n+3]
		br, bi := b*real(r1), b*imag(r1)
		cr, ci := c*real(r2), c*imag(r2)
		dr, di := d*real(r3), d*imag(r3)
		sum := complex(a+br+cr+dr, bi+ci+di)
		m := float64(n) - mid
		moment := complex(m*real(sum)+br+2*cr+3*dr, m*imag(sum)+bi+2*ci+3*di)
		h += z * sum
		nh += z * moment
		z *= r4
	}
	for n := fours; n < len(x); n++ {
		v := complex(x[n], 0) * turn(w*float64(n))
		h += v
		nh += complex(float64(n)-mid, 0) * v
	}
	return h, nh
}

// support is x without the zeros at its ends, and the index it begins at; nil
// when x is all zeros.
func support(x []float64) (trimmed []float64, from int) {
	to := len(x)
	for from < to && x[from] == 0 {
		from++
	}
	for to > from && x[to-1] == 0 {
		to--
	}
	if from == to {
		return nil, 0
	}
	return x[from:to], from
}

// reversed is x backwards in time, in a slice of its own.
func reversed(x []float64) []float64 {
	y := make([]float64, len(x))
	for i, v := range x {
		y[len(x)-1-i] = v
	}
	return y
}
