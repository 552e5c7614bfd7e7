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
	peak float64      // max |H|² over the grid

	// along is Re{N H*}, that is |H|² times the group delay after mid; see moments.
	along       []float64
	white, pink *weighting
}

// gridDensity keeps bins 0.1 Hz apart or closer, so that 1/f weights at 20 Hz
// see a smooth function however short the response.
const gridDensity = 10

// newSpectrum transforms x about the index mid; K is at least refine times the
// least allowed: 8 times the length, and ten bins a Hz.
func newSpectrum(x []float64, mid, rate float64, refine int) *spectrum {
	size := refine * fastLength(max(8*len(x), int(math.Ceil(gridDensity*rate))))
	s := &spectrum{rate: rate, x: x, mid: mid, size: size, step: rate / float64(size)}
	s.h = response.Spectrum(x, size)
	for _, c := range s.h {
		s.peak = max(s.peak, power(c))
	}
	return s
}

// moments transforms (n-mid)·x as well, but keeps no more of it than along and what
// the weightings need: it is as long as h.
func (s *spectrum) moments() {
	s.along = make([]float64, len(s.h))
	s.white, s.pink = s.whiteWeighting(), s.pinkWeighting()
	faint := s.faint()
	nh := response.Sequence{X: s.x, Moments: true, Origin: s.mid}
	response.NewTransform(s.size, len(s.x)).Each(func(k int, v []complex128) {
		n, h := v[0], s.h[k]
		s.along[k] = inPhase(n, h)
		across := quadrature(n, h)
		if hh := power(h); hh < faint {
			s.white.addFaint(k, power(n))
			s.pink.addFaint(k, power(n))
		} else {
			s.white.addAcross(k, across*across/hh)
			s.pink.addAcross(k, across*across/hh)
		}
	}, nh)
}

// each visits the bins whose weighted sum is the integral over lo..hi in Hz.
func (s *spectrum) each(lo, hi float64, visit func(k int, width float64)) {
	response.EachBin(s.step, lo, hi, visit)
}

// turns is e^(j2πkt/K) for k = first, first + 1, ...: what turns bins of the transform
// of x as if x began t samples earlier.
func (s *spectrum) turns(first int, t float64) *response.Turns {
	return response.NewTurns(2*math.Pi*t/float64(s.size), first)
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
