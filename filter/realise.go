package filter

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"sync"

	"fettle/filter/design"
	"fettle/filter/response"
	"fettle/filter/stream"
)

// Filter is a chain realised at one rate.
type Filter struct {
	chain *Chain
	rate  int
	as    Realisation
	paths []*Path // the last serves every channel that no stage names
	align alignment
	spare sync.Pool // of *Slab
}

// Path is what one or more channels of a Filter go through. Its parts commute,
// so all kernels of a path are one and all recursive stages are one cascade.
type Path struct {
	// Channel is the channel (from 1) that the path serves, 0 for all that no
	// stage names.
	Channel int
	System  response.System // with every gain in it, without Delay

	// Delay in whole samples is what the chain's delay stages ask for; their
	// fraction is in System.
	Delay int

	// Notes are what the stages' designs came to at this rate, Warnings what
	// was asked for and is left out.
	Notes, Warnings []string

	members  group
	fraction float64 // of a sample that the delay stages ask for beyond Delay
	bulk     float64 // latency of System in samples, by the chain's align
	lag      int     // whole samples that a fractional kernel in System costs
	fir      *stream.FIR
	target   func() float64
}

// Realise builds the chain at a sample rate in Hz. as overrides the phases in
// the chain's file, except where a stage says given; Written leaves them.
//
// It fails with an error that wraps ErrForRecording and names the stage's
// place in the file where the rate cannot hold a frequency, and where a kernel
// would be too long.
func (c *Chain) Realise(rate int, as Realisation) (*Filter, error) {
	if rate < 1 {
		return nil, fmt.Errorf("a sample rate of %d Hz is none", rate)
	}
	f := &Filter{chain: c, rate: rate, as: as}
	for _, channel := range c.namedChannels() {
		p, err := c.realisePath(channel, float64(rate), as)
		if err != nil {
			return nil, err
		}
		f.paths = append(f.paths, p)
	}
	f.align = f.alignPaths()
	for _, p := range f.paths {
		if err := p.shiftFraction(f.align.fraction(p)); err != nil {
			return nil, &recordingError{ChainError{File: c.File, Msg: err.Error()}}
		}
		if p.System.Taps != nil {
			p.fir = stream.NewFIR(p.System.Taps)
		}
	}
	return f, nil
}

// namedChannels lists every channel that a stage names, then 0.
func (c *Chain) namedChannels() []int {
	var out []int
	seen := map[int]bool{}
	for _, s := range c.Stages {
		for _, n := range s.Channels {
			if !seen[n] {
				seen[n] = true
				out = append(out, n)
			}
		}
	}
	return append(out, 0)
}

// realisePath builds what one channel goes through.
func (c *Chain) realisePath(channel int, rate float64, as Realisation) (*Path, error) {
	p := &Path{Channel: channel}
	b := parts{gain: 1, tolerance: c.Tolerance}
	for i, s := range c.Stages {
		if !s.serves(channel) || !s.When.Holds(rate) {
			continue
		}
		planned, err := s.plan(rate)
		if err != nil {
			return nil, c.stageError(i, err)
		}
		m := member{s, s.phaseUnder(c.Phase, as), planned}
		if err := b.add(m); err != nil {
			return nil, c.stageError(i, err)
		}
		p.members = append(p.members, m)
		p.Notes = append(p.Notes, m.notes...)
		p.Warnings = append(p.Warnings, m.warnings...)
	}
	if err := b.finish(); err != nil {
		return nil, &recordingError{ChainError{File: c.File, Msg: err.Error()}}
	}
	p.remark(b.linear)
	p.take(b)
	p.target = sync.OnceValue(func() float64 { return p.measureTarget(c.Tolerance) })
	return p, nil
}

// remark notes where a realisation strays from the target by design.
func (p *Path) remark(linear group) {
	if slices.ContainsFunc(linear, func(m member) bool { return m.cusps != nil }) {
		p.Notes = append(p.Notes, "beside its zeros the linear kernel follows smooth twins, which stray by up to 0.13 dB each")
	}
	if slices.ContainsFunc(p.members, func(m member) bool { return m.mask != nil && (m.phase == IIR || m.phase == Zero) }) {
		p.Notes = append(p.Notes, "a mask is met by an elliptic filter, whose curve inside the mask is another than a kernel's")
	}
	if slices.ContainsFunc(p.members, func(m member) bool { return m.phase == Zero && !m.stage.kind.intent }) {
		p.Notes = append(p.Notes, "run forward and backward, filters of half the order or gain come near to the target only")
	}
}

// stageError puts an error in a stage's place: of the chain itself where no
// rate could help, else of recordings at this rate.
func (c *Chain) stageError(i int, err error) error {
	s := c.Stages[i]
	e := ChainError{c.File, s.at.line, s.at.column, fmt.Sprintf("stage %d, %s: %v", i+1, s.Kind, err)}
	if errors.Is(err, errPhase) {
		return &e
	}
	return &recordingError{e}
}

// take turns the gathered parts into the path, the gain folded into whatever
// is there to hold it.
func (p *Path) take(b parts) {
	p.System = response.System{Taps: b.taps, Sections: b.sections, Zero: b.zero}
	if b.gain != 1 {
		switch {
		case b.taps != nil:
			p.System.Taps = scaled(b.taps, b.gain)
		case b.sections != nil:
			s := &p.System.Sections[0]
			s.B0, s.B1, s.B2 = s.B0*b.gain, s.B1*b.gain, s.B2*b.gain
		default:
			p.System.Taps = []float64{b.gain}
		}
	}
	if len(p.System.Taps) == 1 && p.System.Taps[0] == 1 {
		p.System.Taps = nil
	}
	p.Delay = int(math.Round(b.delay))
	p.fraction = b.delay - float64(p.Delay)
}

// nearWhole in samples is how near to a whole sample a delay counts as whole:
// far below what any rate in use can tell apart.
const nearWhole = 1e-9

// shiftFraction delays System by what the delay stages ask for below one
// sample, less the fraction of its latency that is to be removed.
func (p *Path) shiftFraction(removed float64) error {
	by := p.fraction - removed
	whole := math.Ceil(by - 0.5) // leaves a half as +0.5
	p.Delay += int(whole)
	if by -= whole; math.Abs(by) < nearWhole {
		return nil
	}
	taps, centre, err := design.FractionalDelay(by)
	if err != nil {
		return err
	}
	p.lag = centre
	p.Notes = append(p.Notes, "a fraction of a sample is exact up to 0.45 of the rate; above, the level falls towards half the rate")
	if p.System.Taps == nil {
		p.System.Taps = taps
	} else {
		p.System.Taps = convolve(p.System.Taps, taps)
	}
	return nil
}
