package filter

import (
	"math"
	"slices"

	"fettle/filter/response"
	"fettle/filter/stream"
	"fettle/filter/stream/machine"
)

// Latency is what a path delays and what Apply takes away, in samples. Delay
// stages are intent and in none of these.
type Latency struct {
	// Exact is the bulk latency (response.BulkLatency), or the centroid where
	// the chain aligns by that. It may have a fraction and may be negative.
	Exact float64
	// Removed is what Apply removes. It is whole unless the chain asks for
	// the fraction to be removed too.
	Removed float64
	// Residual is Exact less Removed: what is left.
	Residual float64
	// LookAhead is how many frames of input after a frame its output needs.
	LookAhead int
}

// alignment is how a filter's paths are brought in line. All channels of a
// recording are shifted alike: what a stage costs one channel delays the
// others by as many whole samples, then one figure is removed from all. It is
// rounded once: two channels half a sample apart stay so.
type alignment struct {
	to       Align
	greatest float64 // bulk latency of the latest path
	removed  int     // whole samples removed from every channel
}

func (f *Filter) alignPaths() alignment {
	a := alignment{to: f.chain.Align}
	for i, p := range f.paths {
		p.bulk = p.latencyBy(a.to.To, float64(f.rate))
		if i == 0 || p.bulk > a.greatest {
			a.greatest = p.bulk
		}
	}
	switch a.to.To {
	case AlignAuto, AlignCentroid:
		a.removed = int(math.Round(a.greatest))
	case AlignBy:
		a.removed = a.to.By
	}
	return a
}

// latencyBy finds the path's own latency, delay stages left out.
func (p *Path) latencyBy(to AlignTo, rate float64) float64 {
	h, origin := p.impulse()
	if to == AlignCentroid {
		return centroid(h) - float64(origin)
	}
	return response.BulkDelay(h, rate) - float64(origin)
}

// centroid is the energy's mean instant, sum n h^2 / sum h^2.
func centroid(h []float64) float64 {
	var moment, energy float64
	for n, v := range h {
		moment += float64(n) * v * v
		energy += v * v
	}
	if energy == 0 {
		return 0
	}
	return moment / energy
}

// impulse is the response of System until what is left is negligible, and the
// index of its instant 0: what comes before it is the backward run's.
func (p *Path) impulse() (h []float64, origin int) {
	taps := []float64{1}
	if p.System.Taps != nil {
		taps = p.System.Taps
	}
	zero := p.System.Zero
	ahead, behind := p.ahead(), tail(p.System.Sections)+tail(zero)
	h = make([]float64, ahead+len(taps)+behind)
	copy(h[ahead:], taps)
	run(append(append([]response.Section(nil), p.System.Sections...), zero...), h)
	if len(zero) > 0 {
		slices.Reverse(h)
		run(zero, h)
		slices.Reverse(h)
	}
	return h, ahead
}

func run(sections []response.Section, h []float64) {
	if len(sections) > 0 {
		// The portable kernel: what is rounded to whole samples must not depend on
		// the machine.
		stream.NewCascade(sections, 1, machine.Portable).Process([][]float64{h}, [][]float64{h})
	}
}

// tail is how long a cascade rings.
func tail(sections []response.Section) int {
	if len(sections) == 0 {
		return 0
	}
	return stream.NewCascade(sections, 1, machine.Portable).Tail()
}

// wait is by how many samples a path is delayed to keep the latest company.
func (a alignment) wait(p *Path) int { return int(math.Round(a.greatest - p.bulk)) }

// fraction is the part of a sample to be removed from a path, 0 unless the
// chain asks for it.
func (a alignment) fraction(p *Path) float64 {
	if !a.to.Fraction {
		return 0
	}
	return p.bulk + float64(a.wait(p)-a.removed)
}

// skip is how many samples of System's output precede the aligned instant;
// negative: the output has to wait.
func (a alignment) skip(p *Path) int { return a.removed - a.wait(p) + p.lag }

// Latency tells what is delayed and removed on a path.
func (f *Filter) Latency(p *Path) Latency {
	exact := p.bulk + float64(f.align.wait(p))
	removed := float64(f.align.removed) + f.align.fraction(p)
	return Latency{
		Exact:     exact,
		Removed:   removed,
		Residual:  exact - removed,
		LookAhead: max(0, f.align.skip(p)-p.Delay+p.ahead()),
	}
}
