package figures

import (
	"math"

	"fettle/filter/response"
)

// Smear is the RMS duration of a response, in seconds: Total² is Magnitude² + Phase².
type Smear struct {
	Total     float64
	Magnitude float64 // what the shape of |H| costs any realisation
	Phase     float64 // what phase adds
}

// noMagnitude is how far under its maximum |H| is too small to tell phase from
// magnitude: all of |N|² there counts as magnitude.
const noMagnitude = 1e-9

// faint is the |H|² under which phase cannot be told from magnitude.
func (s *spectrum) faint() float64 { return noMagnitude * noMagnitude * s.peak }

// weighting is how much bins first to last count, and their sums that need the
// imaginary part of the moments.
type weighting struct {
	first, last int
	at          func(k int) float64
	across      float64 // Σ w·(Im{N H*})²/|H|² where |H| can tell
	faint       float64 // Σ w·|N|² where it cannot
}

// whiteWeighting counts every bin of the two-sided transform once.
func (s *spectrum) whiteWeighting() *weighting {
	last := len(s.h) - 1
	return &weighting{last: last, at: func(k int) float64 {
		if k == 0 || k == last {
			return 1
		}
		return 2
	}}
}

func (s *spectrum) pinkWeighting() *weighting {
	q := response.PinkQuadrature(s.step, s.rate)
	return &weighting{first: q.First, last: q.Last, at: q.Pink}
}

func (w *weighting) addAcross(k int, v float64) {
	if k >= w.first && k <= w.last {
		w.across += w.at(k) * v
	}
}

func (w *weighting) addFaint(k int, v float64) {
	if k >= w.first && k <= w.last {
		w.faint += w.at(k) * v
	}
}

// smear is the RMS duration under the given weights, about their own centroid
// (Cohen 1995, Time-Frequency Analysis, chapter 1: variance of time as the
// weighted mean of (d|H|/dω)² plus that of the group delay's square).
func (s *spectrum) smear(w *weighting) Smear {
	var energy, moment float64
	for k := w.first; k <= w.last; k++ {
		energy += w.at(k) * power(s.h[k])
		moment += w.at(k) * s.along[k]
	}
	centroid := moment / energy
	// Moments about the centroid are N - centroid·H. What is across H does not change.
	magnitude, phase := w.across+w.faint, 0.0
	faint := s.faint()
	for k := w.first; k <= w.last; k++ {
		hh := power(s.h[k])
		if hh < faint {
			magnitude += w.at(k) * centroid * (centroid*hh - 2*s.along[k])
			continue
		}
		p := s.along[k] - centroid*hh
		phase += w.at(k) * p * p / hh
	}
	toSeconds := func(variance float64) float64 { return math.Sqrt(max(variance/energy, 0)) / s.rate }
	return Smear{Total: toSeconds(magnitude + phase), Magnitude: toSeconds(magnitude), Phase: toSeconds(phase)}
}

// shortestHolding is the shortest time, in samples from its first to its last, that
// holds the given share of Σx².
func shortestHolding(x []float64, share float64) int {
	var total float64
	for _, v := range x {
		total += v * v
	}
	best, from, held := len(x)-1, 0, 0.0
	for to, v := range x {
		held += v * v
		for from < to && held-x[from]*x[from] >= share*total {
			held -= x[from] * x[from]
			from++
		}
		if held >= share*total {
			best = min(best, to-from)
		}
	}
	return best
}
