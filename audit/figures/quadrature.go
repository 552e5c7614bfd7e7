package figures

import (
	"math"

	"gonum.org/v1/gonum/integrate/quad"
)

// enoughBins is how many bins a band must hold for its integrals to be sums over
// bins; a narrower one is evaluated directly, at the points of a quadrature.
const enoughBins = 256

// bandSample is the response at the points of one band: integrals over the band
// are weighted sums.
type bandSample struct {
	hz    []float64
	width []float64    // weights of ∫ df, Hz
	h, nh []complex128 // DFT(x), DFT((n-mid)·x)
}

func (s *spectrum) sample(b Band) *bandSample {
	if b.width() < enoughBins*s.step {
		return s.sampleDirectly(b)
	}
	p := &bandSample{}
	s.each(b.Lower, b.Upper, func(k int, width float64) {
		p.add(float64(k)*s.step, width, s.h[k], s.nh[k])
	})
	return p
}

func (s *spectrum) sampleDirectly(b Band) *bandSample {
	p := &bandSample{}
	hz, width := legendre(b, float64(len(s.x))/s.rate)
	for i, f := range hz {
		h, nh := transformAt(s.x, s.mid, f, s.rate)
		p.add(f, width[i], h, nh)
	}
	return p
}

func (p *bandSample) add(hz, width float64, h, nh complex128) {
	p.hz = append(p.hz, hz)
	p.width = append(p.width, width)
	p.h = append(p.h, h)
	p.nh = append(p.nh, nh)
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
		e += p.width[i] * power(h)
	}
	return e
}

// delay is the energy-weighted mean group delay in samples after mid, and the
// RMS of what is left; where |H|² is under floor it counts in the mean only.
func (p *bandSample) delay(floor float64) (mean, spread float64) {
	e := p.energy()
	for i, h := range p.h {
		mean += p.width[i] * inPhase(p.nh[i], h) / e
	}
	for i, h := range p.h {
		if hh := power(h); hh >= floor {
			off := inPhase(p.nh[i], h) - mean*hh
			spread += p.width[i] * off * off / hh / e
		}
	}
	return mean, math.Sqrt(max(spread, 0)) // weights at a band's ends may be negative
}

// inPhase is Re{a·b*}, quadrature Im{a·b*}.
func inPhase(a, b complex128) float64    { return real(a)*real(b) + imag(a)*imag(b) }
func quadrature(a, b complex128) float64 { return imag(a)*real(b) - real(a)*imag(b) }

// mixed is ∫|1+H e^(j2πf·origin)|² df and ∫(1+|H|)² df: the aligned response mixed 1:1
// with the untouched original, and the most that magnitude allows.
func (p *bandSample) mixed(origin, rate float64) (sum, most float64) {
	for i, h := range p.h {
		sum += p.width[i] * power(1+h*turn(2*math.Pi*p.hz[i]*origin/rate))
		m := 1 + math.Sqrt(power(h))
		most += p.width[i] * m * m
	}
	return sum, most
}
