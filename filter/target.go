package filter

import (
	"math"
	"math/cmplx"
	"slices"

	"fettle/filter/design"
	"fettle/filter/response"
)

// member is a stage at one rate, ready to be realised.
type member struct {
	stage *Stage
	phase Realisation
	plan
}

// levels is the stage's part of the target on a grid; see design.Target. What
// has a curve, given or classical, has it for a target; a mask has its bounds.
func (m member) levels(size int) []design.Level {
	out := make([]design.Level, size/2+1)
	var spectrum []complex128
	if m.taps != nil {
		spectrum = response.Spectrum(m.taps, size)
	}
	for k := range out {
		if m.taps != nil {
			out[k] = scale(curveLevel(cmplx.Abs(spectrum[k])), math.Abs(m.gain))
		} else {
			out[k] = m.level(2 * math.Pi * float64(k) / float64(size))
		}
	}
	return out
}

// level is the stage's part of the target at one frequency.
func (m member) level(omega float64) design.Level {
	var l design.Level
	switch {
	case m.mask != nil:
		lo, hi := m.mask.Bounds(omega / (2 * math.Pi) * m.mask.Rate)
		l = design.Level{Aim: hi, Low: lo, High: hi}
	case m.taps != nil:
		l = curveLevel(cmplx.Abs(response.TapsAt(m.taps, omega)))
	default:
		l = curveLevel(cmplx.Abs(response.SectionsAt(m.sections, omega)))
		if m.cusp != nil {
			l = m.cusp.level(omega, l.Aim)
		}
	}
	return scale(l, math.Abs(m.gain))
}

func curveLevel(a float64) design.Level { return design.Level{Aim: a, Low: a, High: a} }

func scale(l design.Level, by float64) design.Level {
	return design.Level{Aim: l.Aim * by, Low: l.Low * by, High: l.High * by, Allow: l.Allow}
}

// finest is the width of the stage's narrowest feature in radians a sample.
func (m member) finest() float64 {
	f := 2 * math.Pi
	if m.sections != nil {
		// The -3 dB width of a resonance at radius r is 2 (1 - r).
		f = math.Min(f, 2*(1-response.MaxPoleRadius(m.sections)))
	}
	if m.taps != nil {
		f = math.Min(f, 2*math.Pi/float64(len(m.taps)))
	}
	if m.mask != nil {
		f = math.Min(f, 2*math.Pi*m.mask.Narrowest()/m.mask.Rate)
	}
	return f
}

// group is stages that share a target: its level is the product of theirs.
type group []member

func (g group) finest() float64 {
	f := 2 * math.Pi
	for _, m := range g {
		f = math.Min(f, m.finest())
	}
	return f
}

// target is the product of the members' targets. Where smooth twins stray,
// their allowances add, and the chain's tolerance holds where it is more.
func (g group) target(tolerance float64) design.Target {
	t := design.Target{At: func(omega float64) design.Level {
		l := curveLevel(1)
		for _, m := range g {
			l = product(l, m.level(omega))
		}
		l.Allow = math.Max(l.Allow, tolerance)
		return l
	}}
	t.Grid = func(size int) []design.Level {
		out := make([]design.Level, size/2+1)
		for k := range out {
			out[k] = curveLevel(1)
		}
		for _, m := range g {
			for k, l := range m.levels(size) {
				out[k] = product(out[k], l)
			}
		}
		for k := range out {
			out[k].Allow = math.Max(out[k].Allow, tolerance)
		}
		return out
	}
	for _, m := range g {
		t.Points = append(t.Points, m.points()...)
	}
	return t
}

// points lists the frequencies where the stage's target is much finer than its
// poles tell: at a zero on the unit circle an error changes from its modulus to
// its part in phase within a hundredth of the width.
func (m member) points() []float64 {
	var out []float64
	if m.cusp != nil {
		out = append(out, m.cusp.points...)
	}
	width := m.finest()
	for _, s := range m.sections {
		for _, z := range s.Zeros() {
			if imag(z) < 0 || math.Abs(cmplx.Abs(z)-1) > onCircle {
				continue
			}
			at := cmplx.Phase(z)
			for _, d := range []float64{0, 0.001, 0.003, 0.01, 0.03, 0.1} {
				for _, omega := range []float64{at - d*width, at + d*width} {
					if omega >= 0 && omega <= math.Pi {
						out = append(out, omega)
					}
				}
			}
		}
	}
	slices.Sort(out)
	return slices.Compact(out)
}

// onCircle is how near to the unit circle a zero counts as on it: rounding
// splits a double zero by about the root of the working precision.
const onCircle = 1e-6

func product(a, b design.Level) design.Level {
	return design.Level{Aim: a.Aim * b.Aim, Low: a.Low * b.Low, High: a.High * b.High, Allow: a.Allow + b.Allow}
}
