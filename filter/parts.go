package filter

import (
	"fettle/filter/design"
	"fettle/filter/response"

	"gonum.org/v1/gonum/dsp/fourier"
)

// parts gathers a path while its stages are realised.
type parts struct {
	tolerance float64 // dB
	gain      float64
	delay     float64
	taps      []float64
	sections  []response.Section
	zero      []response.Section
	linear    group // curves that become one symmetric kernel
	minimum   group // and one minimum-phase kernel
}

// add takes a stage in, in its phase.
func (b *parts) add(m member) error {
	switch {
	case m.stage.kind.intent, m.phase == Given, m.phase == IIR:
		return b.asGiven(m)
	case m.phase == Zero:
		return b.forwardBackward(m)
	case m.mask != nil || m.taps != nil:
		return b.kernel(m)
	case m.phase == Linear:
		b.linear = append(b.linear, m)
	default:
		b.minimum = append(b.minimum, m)
	}
	return nil
}

// finish makes the kernels of the stages that share one.
func (b *parts) finish() error {
	if err := b.linearKernel(b.linear); err != nil {
		return err
	}
	return b.minimumKernel(b.minimum)
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
func (b *parts) kernel(m member) error {
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
		return b.linearKernel(group{m})
	}
	taps, _, err := design.MinimumPhase(m.taps, b.tolerance)
	if err == nil {
		b.convolve(taps)
	}
	return err
}

// symmetryTolerance, relative to the greatest tap, allows for taps printed
// with twelve digits.
const symmetryTolerance = 1e-11

// linearKernel adds stages as one symmetric kernel.
func (b *parts) linearKernel(g group) error {
	if len(g) == 0 {
		return nil
	}
	taps, err := design.LinearPhase(g.aim(b.tolerance), g.finest())
	if err == nil {
		b.convolve(taps)
	}
	return err
}

// minimumKernel adds stages that have poles and zeros as one minimum-phase kernel:
// their own impulse response, zeros reflected, cut below the tolerance.
func (b *parts) minimumKernel(g group) error {
	if len(g) == 0 {
		return nil
	}
	var sections []response.Section
	for _, m := range g {
		reflected, err := design.ReflectSections(m.sections)
		if err != nil {
			return err
		}
		sections = append(sections, reflected...)
	}
	target := g.target(b.tolerance)
	for n := 1024; n <= 2*design.MaxTaps; n *= 2 {
		h := response.Impulse(sections, n)
		if cut, ok := design.CutTail(h, target, g.finest()); ok && len(cut) <= design.MaxTaps {
			b.convolve(cut)
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
