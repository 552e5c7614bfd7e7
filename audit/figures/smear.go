package figures

import "math"

// Smear is the RMS duration of a response, in seconds: Total² is Magnitude² + Phase².
type Smear struct {
	Total     float64
	Magnitude float64 // what the shape of |H| costs any realisation
	Phase     float64 // what phase adds
}

// noMagnitude is how far under its maximum |H| is too small to tell phase from
// magnitude: all of |N|² there counts as magnitude.
const noMagnitude = 1e-9

// weighting visits the bins of a sum with their weights.
type weighting func(visit func(k int, weight float64))

// whiteWeights counts every bin of the two-sided transform once.
func (s *spectrum) whiteWeights(visit func(k int, weight float64)) {
	last := len(s.h) - 1
	for k := range s.h {
		if k == 0 || k == last {
			visit(k, 1)
		} else {
			visit(k, 2)
		}
	}
}

// smear is the RMS duration under the given weights, about their own centroid
// (Cohen 1995, Time-Frequency Analysis, chapter 1: variance of time as the
// weighted mean of (d|H|/dω)² plus that of the group delay's square).
func (s *spectrum) smear(each weighting) Smear {
	var energy, moment float64
	each(func(k int, w float64) {
		energy += w * power(s.h[k])
		moment += w * inPhase(s.nh[k], s.h[k])
	})
	centroid := complex(moment/energy, 0)
	floor := noMagnitude * noMagnitude * s.peak
	var magnitude, phase float64
	each(func(k int, w float64) {
		h := s.h[k]
		n := s.nh[k] - centroid*h
		hh := power(h)
		if hh < floor {
			magnitude += w * power(n)
			return
		}
		p, m := inPhase(n, h), quadrature(n, h)
		phase += w * p * p / hh
		magnitude += w * m * m / hh
	})
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
