package filter

import (
	"math"
	"math/cmplx"
	"slices"

	"fettle/filter/design"
	"fettle/filter/response"
	"fettle/filter/stream"
)

// Rate is the sample rate in Hz that the filter was realised for.
func (f *Filter) Rate() int { return f.rate }

// Chain is the chain that was realised.
func (f *Filter) Chain() *Chain { return f.chain }

// Phase names the realisation: what the caller asked for, else the chain's
// own phase, else given.
func (f *Filter) Phase() Realisation {
	switch {
	case f.as != Written:
		return f.as
	case f.chain.Phase != Written:
		return f.chain.Phase
	}
	return Given
}

// Paths lists the ways that channels take, the one for all channels that no
// stage names last. Most chains have one.
func (f *Filter) Paths() []*Path { return f.paths }

// Untouched tells whether a channel (from 1) comes out with the very samples
// that went in, moved by whole frames at most: nothing is requantised.
func (f *Filter) Untouched(channel int) bool {
	s := f.PathOf(channel).System
	return s.Taps == nil && len(s.Sections) == 0 && len(s.Zero) == 0
}

// Reach is how many samples before and after the aligned instant a path's
// output to a single impulse may be other than negligible.
func (f *Filter) Reach(p *Path) (before, after int) {
	after = p.Delay + tail(p.System.Sections) + tail(p.System.Zero)
	if p.System.Taps != nil {
		after += len(p.System.Taps) - 1
	}
	skip := f.align.skip(p)
	return max(0, skip+p.ahead()), max(0, after-skip)
}

// ahead is how far a backward run reaches before the instant it answers to.
func (p *Path) ahead() int {
	if len(p.System.Zero) == 0 {
		return 0
	}
	return stream.LookAhead(p.System.Zero)
}

// Operations is about how many multiplications a sample costs on a path: five a
// section, and for sections run both ways that and half as much again backward.
func (p *Path) Operations() float64 {
	n := 5*float64(len(p.System.Sections)) + 5*2.5*float64(len(p.System.Zero))
	if p.fir != nil {
		n += p.fir.Operations()
	}
	return n
}

// Character says what kind of filter a path is; kernels of more than
// longCharacter taps are only looked at for symmetry, ok is false then unless
// they have it.
func (p *Path) Character() (c response.Character, ok bool) {
	s := p.System
	if len(s.Taps) > longCharacter && response.Symmetry(s.Taps, symmetryTolerance) == response.None {
		return response.Character{}, false
	}
	if len(s.Taps) > longCharacter {
		return response.Character{Linear: response.Symmetry(s.Taps, symmetryTolerance), Margin: 1, Causal: len(s.Zero) == 0}, len(s.Sections) == 0
	}
	return s.Character(symmetryTolerance), true
}

// longCharacter bounds what counting a kernel's zeros may cost: two transforms
// of 64 times its length.
const longCharacter = 1 << 13

// Shift is how many samples of a path's causal response (Path.Response) come
// before the aligned instant.
func (f *Filter) Shift(p *Path) int { return f.align.skip(p) }

// ShapesTone tells whether a stage of the path shapes what is carried instead
// of bounding it: gain, bells and shelves.
func (p *Path) ShapesTone() bool {
	return slices.ContainsFunc(p.members, func(m member) bool { return m.stage.kind.tone })
}

// Carrier is the path without what shapes tone (gain, bells, shelves): it
// decides which bands count as carried. It gives |H| on the grid of a
// transform of size points.
func (p *Path) Carrier(size int) []float64 {
	out := p.System.Magnitude(size)
	for _, m := range p.members {
		if !m.stage.kind.tone {
			continue
		}
		level := m.levels(size)
		for k := range out {
			if aim := level(k).Aim; aim > 0 {
				out[k] /= aim
			}
		}
	}
	return out
}

// TargetAt is between what a path's |H| is to lie at a frequency in Hz, linear and
// before any tolerance. The two are equal for a plain curve; low is 0 where deeper
// is free.
func (f *Filter) TargetAt(p *Path, hz float64) (low, high float64) {
	l := p.members.target(f.chain.Tolerance).At(2 * math.Pi * hz / float64(f.rate))
	return l.Low, l.High
}

// TargetErrorDB is how far the path's magnitude strays from the chain's
// target, in dB: the least tolerance that it meets at every frequency, an
// error 80 dB under the greatest level forgiven (design.FloorDB). It is
// measured on the realised coefficients, on a grid of 22 points to the
// narrowest feature.
func (p *Path) TargetErrorDB() float64 { return p.target() }

func (p *Path) measureTarget(tolerance float64) float64 {
	if len(p.members) == 0 {
		return 0
	}
	size := design.GridFor(p.members.finest())
	for size < 8*len(p.System.Taps) {
		size *= 2
	}
	magnitude := p.System.Magnitude(size)
	target := p.members.target(tolerance)
	if p.lag > 0 { // a fractional delay makes no promise above; see Notes
		target = upTo(target, 0.45)
	}
	return target.Sample(size).ErrorDB(design.Magnitude{
		Bin: func(k int) float64 { return magnitude[k] },
		At:  func(omega float64) float64 { return cmplx.Abs(p.System.At(omega)) },
	})
}

// Response gives the path's causal response on the grid of a transform of
// size points: H, and group delay in samples, delay stages included; NaN where
// it is not stated.
func (p *Path) Response(size int) (h []complex128, tau []float64) {
	tau = p.System.GroupDelay(size)
	for k := range tau {
		tau[k] += float64(p.Delay)
	}
	return p.Spectrum(size), tau
}

// Spectrum is the H of Response alone.
func (p *Path) Spectrum(size int) []complex128 {
	h := p.System.Spectrum(size)
	for k := range h {
		omega := 2 * math.Pi * float64(k) / float64(size)
		h[k] *= cmplx.Rect(1, -omega*float64(p.Delay))
	}
	return h
}
