package figures

import (
	"math"

	"fettle/filter/response"

	"gonum.org/v1/gonum/integrate/quad"
)

// enoughBins is how many bins a band must hold for its integrals to be sums over
// bins; a narrower one is evaluated directly, at the points of a quadrature.
const enoughBins = 256

// bandSample is the response at the points of one band: integrals over the band
// are weighted sums.
type bandSample struct {
	width func(i int) float64               // of point i: weight of ∫ df, Hz
	turns func(t float64) func() complex128 // one point after another: e^(j2πft), t in samples
	h     []complex128                      // DFT(x)
	along []float64                         // Re{N H*}
}

func (s *spectrum) sample(b Band) *bandSample {
	if b.width() < enoughBins*s.step {
		return s.sampleDirectly(b)
	}
	q := response.NewQuadrature(s.step, b.Lower, b.Upper)
	return &bandSample{
		width: func(i int) float64 { return q.Width(q.First + i) },
		turns: func(t float64) func() complex128 { return s.turns(q.First, t).Next },
		h:     s.h[q.First : q.Last+1], along: s.along[q.First : q.Last+1],
	}
}

func (s *spectrum) sampleDirectly(b Band) *bandSample {
	hz, width := legendre(b, float64(len(s.x))/s.rate)
	p := &bandSample{
		width: func(i int) float64 { return width[i] },
		turns: func(t float64) func() complex128 {
			i := -1
			return func() complex128 {
				i++
				return turn(2 * math.Pi * hz[i] * t / s.rate)
			}
		},
	}
	near := newNearBand(s.x, s.mid, b, s.rate)
	for _, f := range hz {
		h, nh := near.at(f)
		p.h, p.along = append(p.h, h), append(p.along, inPhase(nh, h))
	}
	return p
}

// legendre is the Gauss-Legendre rule for a band of a response that lasts the given
// seconds. The squared magnitude is band-limited: over the band it makes width
// times duration cycles at most, a cycle needs π points (Trefethen 2008, SIAM
// Review 50, section 3), and 32 more bring the error down to rounding.
func legendre(b Band, seconds float64) (hz, weights []float64) {
	n := 32 + 8*int(math.Ceil(math.Pi*b.width()*seconds/8))
	hz, weights = make([]float64, n), make([]float64, n)
	quad.Legendre{}.FixedLocations(hz, weights, b.Lower, b.Upper)
	return hz, weights
}

// energy is ∫|H|² df.
func (p *bandSample) energy() float64 {
	var e float64
	for i, h := range p.h {
		e += p.width(i) * power(h)
	}
	return e
}

// delay is the energy-weighted mean group delay in samples after mid, and the
// RMS of what is left; where |H|² is under floor it counts in the mean only.
func (p *bandSample) delay(floor float64) (mean, spread float64) {
	e := p.energy()
	for i, along := range p.along {
		mean += p.width(i) * along / e
	}
	for i, h := range p.h {
		if hh := power(h); hh >= floor {
			off := p.along[i] - mean*hh
			spread += p.width(i) * off * off / hh / e
		}
	}
	return mean, math.Sqrt(max(spread, 0)) // weights at a band's ends may be negative
}

// inPhase is Re{a·b*}, quadrature Im{a·b*}.
func inPhase(a, b complex128) float64    { return real(a)*real(b) + imag(a)*imag(b) }
func quadrature(a, b complex128) float64 { return imag(a)*real(b) - real(a)*imag(b) }

// mixed is ∫|1+H e^(j2πf·origin)|² df and ∫(1+|H|)² df: the aligned response mixed 1:1
// with the untouched original, and the most that magnitude allows.
func (p *bandSample) mixed(origin float64) (sum, most float64) {
	next := p.turns(origin)
	for i, h := range p.h {
		sum += p.width(i) * power(1+h*next())
		m := 1 + math.Sqrt(power(h))
		most += p.width(i) * m * m
	}
	return min(sum, most), most // equal but for rounding where nothing is lost
}
