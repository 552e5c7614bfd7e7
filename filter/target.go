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

// levels is the stage's part of the target at any point of a grid; see
// design.Target. What has a curve, given or classical, has it for a target; a mask
// has its bounds.
func (m member) levels(size int) func(k int) design.Level {
	omega := func(k int) float64 { return 2 * math.Pi * float64(k) / float64(size) }
	gain := math.Abs(m.gain)
	switch {
	case m.mask != nil:
		bounds := m.mask.BoundsFunc()
		return func(k int) design.Level {
			return scale(maskLevel(bounds(omega(k)/(2*math.Pi)*m.mask.Rate)), gain)
		}
	case m.taps != nil:
		magnitude := response.System{Taps: m.taps}.Magnitude(size)
		return func(k int) design.Level { return scale(curveLevel(magnitude[k]), gain) }
	}
	return func(k int) design.Level { return m.level(omega(k)) }
}

// level is the stage's part of the target at one frequency.
func (m member) level(omega float64) design.Level {
	var l design.Level
	switch {
	case m.mask != nil:
		l = maskLevel(m.mask.Bounds(omega / (2 * math.Pi) * m.mask.Rate))
	case m.taps != nil:
		l = curveLevel(cmplx.Abs(response.TapsAt(m.taps, omega)))
	default:
		l = m.sectionsLevel(omega)
	}
	return scale(l, math.Abs(m.gain))
}

// sectionsLevel is the product of the sections' curves, those with a cusp
// one-sided near it.
func (m member) sectionsLevel(omega float64) design.Level {
	if m.cusps == nil {
		return curveLevel(response.SectionsMagnitude(m.sections, omega))
	}
	w := math.Tan(omega / 2)
	l := curveLevel(1)
	for _, c := range m.cusps {
		l = product(l, c.level(w))
	}
	return l
}

// maskLevel aims as high as the mask allows.
func maskLevel(lo, hi float64) design.Level { return design.Level{Aim: hi, Low: lo, High: hi} }

func curveLevel(a float64) design.Level { return design.Level{Aim: a, Low: a, High: a} }

func scale(l design.Level, by float64) design.Level {
	return design.Level{Aim: l.Aim * by, Low: l.Low * by, High: l.High * by}
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

// target is the product of the members' targets, each point with the chain's
// tolerance. Errors are measured against it.
func (g group) target(tolerance float64) design.Target {
	return g.targetBy(func(l design.Level) design.Level {
		l.Allow = tolerance
		return l
	})
}

// aim is the target that kernels are designed for: the same where all members
// have curves. Where smooth twins stray above theirs, the twin is allowed, and
// what is left of the tolerance, or the twins' own margin if that is more.
func (g group) aim(tolerance float64) design.Target {
	return g.targetBy(func(l design.Level) design.Level {
		stray := math.Max(0, 20*math.Log10(l.Aim/l.High))
		l.Allow = tolerance
		if stray > 0 {
			l.Allow = math.Max(tolerance-stray, math.Min(tolerance, twinMargin))
			l.High = l.Aim
			l.Low *= math.Pow(10, (l.Allow-tolerance)/20)
		}
		return l
	})
}

func (g group) targetBy(finish func(design.Level) design.Level) design.Target {
	t := design.Target{At: func(omega float64) design.Level {
		l := curveLevel(1)
		for _, m := range g {
			l = product(l, m.level(omega))
		}
		return finish(l)
	}}
	t.Grid = func(size int) func(k int) design.Level {
		var members []func(k int) design.Level
		for _, m := range g {
			members = append(members, m.levels(size))
		}
		return func(k int) design.Level {
			l := curveLevel(1)
			for _, level := range members {
				l = product(l, level(k))
			}
			return finish(l)
		}
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
	for _, c := range m.cusps {
		out = append(out, c.points...)
	}
	if out != nil {
		return out
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
	return design.Level{Aim: a.Aim * b.Aim, Low: a.Low * b.Low, High: a.High * b.High}
}

// upTo is a target that allows less of everything above a share of the rate.
func upTo(t design.Target, share float64) design.Target {
	free := func(omega float64, l design.Level) design.Level {
		if omega > 2*math.Pi*share {
			l.Low = 0
		}
		return l
	}
	return design.Target{
		Grid: func(size int) func(k int) design.Level {
			level := t.Grid(size)
			return func(k int) design.Level { return free(2*math.Pi*float64(k)/float64(size), level(k)) }
		},
		At:     func(omega float64) design.Level { return free(omega, t.At(omega)) },
		Points: t.Points,
	}
}
