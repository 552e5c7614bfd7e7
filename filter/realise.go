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

	"gonum.org/v1/gonum/dsp/fourier"
)

// Filter is a chain realised at one rate.
type Filter struct {
	chain *Chain
	rate  int
	as    Realisation
	paths []*Path // the last serves every channel that no stage names
	align alignment
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
			return nil, c.groupError(err)
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
	var linear, minimum group
	b := parts{gain: 1}
	for i, s := range c.Stages {
		if !s.serves(channel) || !s.When.Holds(rate) {
			continue
		}
		planned, err := s.plan(rate)
		if err != nil {
			return nil, c.stageError(i, err)
		}
		m := member{s, s.phaseUnder(c.Phase, as), planned}
		p.members = append(p.members, m)
		p.Notes = append(p.Notes, m.notes...)
		p.Warnings = append(p.Warnings, m.warnings...)
		switch {
		case s.kind.intent, m.phase == Given, m.phase == IIR:
			err = b.asGiven(m)
		case m.phase == Zero:
			err = b.forwardBackward(m)
		case m.mask != nil || m.taps != nil:
			err = b.kernel(m, c.Tolerance)
		case m.phase == Linear:
			linear = append(linear, m)
		default:
			minimum = append(minimum, m)
		}
		if errors.Is(err, errPhase) {
			return nil, c.stageError(i, err).ChainError.own()
		}
		if err != nil {
			return nil, c.stageError(i, err)
		}
	}
	if err := b.linear(linear, c.Tolerance); err != nil {
		return nil, c.groupError(err)
	}
	if err := b.minimum(minimum, c.Tolerance); err != nil {
		return nil, c.groupError(err)
	}
	p.remark(linear)
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

// errPhase marks what no rate could help: a stage that has no such realisation.
var errPhase = errors.New("no such realisation")

// phaseError says so in the user's terms.
type phaseError string

func (e phaseError) Error() string        { return string(e) }
func (e phaseError) Is(target error) bool { return target == errPhase }

func (c *Chain) stageError(i int, err error) *recordingError {
	s := c.Stages[i]
	return &recordingError{ChainError{c.File, s.at.line, s.at.column, fmt.Sprintf("stage %d, %s: %v", i+1, s.Kind, err)}}
}

func (c *Chain) groupError(err error) error {
	return &recordingError{ChainError{File: c.File, Msg: err.Error()}}
}

// parts gathers a path while its stages are realised.
type parts struct {
	gain     float64
	delay    float64
	taps     []float64
	sections []response.Section
	zero     []response.Section
}

// forwardBackward adds a stage as sections to be run both ways.
func (b *parts) forwardBackward(m member) error {
	if m.half == nil {
		return phaseError("given coefficients cannot be run both ways without squaring their magnitude; ask for linear, or write phase: given at this stage to keep it")
	}
	sections, err := m.half()
	if err == nil {
		b.zero = append(b.zero, sections...)
		b.gain *= m.gain
	}
	return err
}

// asGiven adds a stage in its own form: recursive, a given kernel, or, for a
// mask, a linear kernel; under iir a mask becomes an elliptic filter.
func (b *parts) asGiven(m member) error {
	b.gain *= m.gain
	b.delay += m.delay
	b.sections = append(b.sections, m.sections...)
	switch {
	case m.taps != nil && m.phase == IIR:
		return phaseError("a given kernel has no recursive form; ask for linear or minimum, or write phase: given at this stage to keep it")
	case m.taps != nil:
		b.convolve(m.taps)
	case m.mask != nil && m.phase == IIR:
		zpk, _, err := design.EllipticFor(*m.mask)
		if err != nil {
			return err
		}
		b.sections = append(b.sections, zpk.Sections()...)
	case m.mask != nil:
		return b.maskKernel(m)
	}
	return nil
}

func (b *parts) maskKernel(m member) error {
	taps, err := m.kernel(*m.mask)
	if err == nil {
		b.convolve(taps)
	}
	return err
}

// kernel adds a mask or a given kernel as linear or minimum phase.
func (b *parts) kernel(m member, tolerance float64) error {
	switch {
	case m.mask != nil && m.phase == Linear:
		return b.maskKernel(m)
	case m.mask != nil:
		taps, err := design.MinimumPhaseMask(*m.mask, m.kernel)
		if err == nil {
			b.convolve(taps)
		}
		return err
	case m.phase == Linear && response.Symmetry(m.taps, symmetryTolerance) != response.None:
		b.convolve(m.taps)
		return nil
	case m.phase == Linear:
		return b.linear(group{m}, tolerance)
	}
	taps, _, err := design.MinimumPhase(m.taps, tolerance)
	if err == nil {
		b.convolve(taps)
	}
	return err
}

// symmetryTolerance, relative to the greatest tap, allows for taps printed
// with twelve digits.
const symmetryTolerance = 1e-11

// linear adds stages as one symmetric kernel.
func (b *parts) linear(g group, tolerance float64) error {
	if len(g) == 0 {
		return nil
	}
	taps, err := design.LinearPhase(g.aim(tolerance), g.finest())
	if err == nil {
		b.convolve(taps)
	}
	return err
}

// minimum adds stages that have poles and zeros as one minimum-phase kernel:
// their own impulse response, zeros reflected, cut below the tolerance.
func (b *parts) minimum(g group, tolerance float64) error {
	if len(g) == 0 {
		return nil
	}
	var sections []response.Section
	gain := 1.0
	for _, m := range g {
		reflected, err := design.ReflectSections(m.sections)
		if err != nil {
			return err
		}
		sections = append(sections, reflected...)
		gain *= m.gain
	}
	target := g.target(tolerance)
	for n := 1024; n <= 2*design.MaxTaps; n *= 2 {
		h := response.Impulse(sections, n)
		if cut, ok := design.CutTail(h, target, g.finest()); ok && len(cut) <= design.MaxTaps {
			b.convolve(scaled(cut, gain))
			return nil
		}
	}
	return &design.LengthError{Realisation: "minimum-phase"}
}

func scaled(taps []float64, by float64) []float64 {
	out := make([]float64, len(taps))
	for i, v := range taps {
		out[i] = v * by
	}
	return out
}

// convolve makes taps follow the kernel so far.
func (b *parts) convolve(taps []float64) {
	if b.taps == nil {
		b.taps = append([]float64(nil), taps...)
		return
	}
	b.taps = convolve(b.taps, taps)
}

// convolve is the full linear convolution of two kernels. Two symmetric
// kernels give one that is symmetric to the last bit, so that rounding can't
// cost linear phase its name.
func convolve(x, y []float64) []float64 {
	n := len(x) + len(y) - 1
	size := response.NextPow2(n)
	fft := fourier.NewFFT(size)
	a := fft.Coefficients(nil, append(append(make([]float64, 0, size), x...), make([]float64, size-len(x))...))
	c := fft.Coefficients(nil, append(append(make([]float64, 0, size), y...), make([]float64, size-len(y))...))
	for k := range a {
		a[k] *= c[k] / complex(float64(size), 0)
	}
	out := fft.Sequence(nil, a)[:n]
	if isSymmetric(x) && isSymmetric(y) {
		for i, j := 0, n-1; i < j; i, j = i+1, j-1 {
			mean := (out[i] + out[j]) / 2
			out[i], out[j] = mean, mean
		}
	}
	return out
}

func isSymmetric(h []float64) bool { return response.Symmetry(h, 0).Symmetric() }

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
