package loudness

import "math"

// The K weighting is tabled for 48 kHz only (BS.1770-4, Annex 1, tables 1 and 2).
// These are the analogue filters that the bilinear transform, run backwards at
// 48 kHz, finds behind the tables. With w0 = 2π hz and s in units of w0:
//
//	(high s² + band s/q + low) / (s² + s/q + 1)
var (
	shelf    = prototype{hz: 1681.974450955533, q: 0.7071752369554197, high: 1.5848647011308554, band: 1.2587209302325617, low: 1}
	highpass = prototype{hz: 38.13547087602444, q: 0.5003270373238774, high: 1.0049948987146884}
)

type prototype struct{ hz, q, high, band, low float64 }

// section is a recursive section of second order and what it remembers
// (transposed direct form II).
type section struct {
	b0, b1, b2, a1, a2 float64
	s1, s2             float64
}

// at is the prototype at a rate in Hz, by the bilinear transform that keeps hz in
// its place.
func (p prototype) at(rate float64) section {
	k := math.Tan(math.Pi * p.hz / rate)
	a0 := 1 + k/p.q + k*k
	return section{
		b0: (p.high + p.band*k/p.q + p.low*k*k) / a0,
		b1: 2 * (p.low*k*k - p.high) / a0,
		b2: (p.high - p.band*k/p.q + p.low*k*k) / a0,
		a1: 2 * (k*k - 1) / a0,
		a2: (1 - k/p.q + k*k) / a0,
	}
}

func (s *section) next(x float64) float64 {
	y := s.b0*x + s.s1
	s.s1 = s.b1*x - s.a1*y + s.s2
	s.s2 = s.b2*x - s.a2*y
	return y
}

// weighting is the K weighting of one channel.
type weighting struct{ shelf, highpass section }

func newWeighting(rate float64) weighting {
	return weighting{shelf.at(rate), highpass.at(rate)}
}

func (w *weighting) next(x float64) float64 { return w.highpass.next(w.shelf.next(x)) }
