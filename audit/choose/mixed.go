package choose

import (
	"fmt"
	"math"

	"fettle/audit/figures"
	"fettle/filter"
)

// LongRing in seconds is how long a stage may ring, as minimum phase by itself,
// until its late energy is -60 dB of all, and still become part of a symmetric
// kernel: what rings longer would, under linear phase, ring ahead of the sound
// for about as long.
const LongRing = 5e-3

// Choice is what mixed does with one stage.
type Choice struct {
	Stage string // its text
	Phase filter.Realisation
	Ring  float64 // s, the longer of white and pink
}

// Mixed writes into a chain a phase for each stage: a stage that rings for
// longer than LongRing at this rate (hum, a low cut) becomes iir, or minimum
// where it is a mask for a kernel; every other stage becomes linear. Stages of intent, of given coefficients or with phase: given keep what
// they have, and so do those that the rate leaves out, which follow the chain's
// phase: linear.
func Mixed(c Chain, rate int) (Chain, []Choice, error) {
	p := phases{chain: filter.Linear, stages: make([]filter.Realisation, len(c.Stages))}
	var choices []Choice
	for i, s := range c.Stages {
		if !isFree(s) || !s.When.Holds(float64(rate)) {
			continue
		}
		choice, err := choiceOf(c.Alone(i), rate)
		if err != nil {
			return Chain{}, nil, err
		}
		choices = append(choices, choice)
		if s.Phase != filter.Written || choice.Phase != filter.Linear {
			p.stages[i] = choice.Phase
		}
	}
	mixed, err := c.rephased(p)
	return mixed, choices, err
}

// choiceOf looks at a chain of one stage.
func choiceOf(alone *filter.Chain, rate int) (Choice, error) {
	choice := Choice{Stage: alone.Stages[0].Text, Phase: filter.Linear}
	f, err := alone.Realise(rate, filter.Minimum)
	if err != nil {
		return choice, err
	}
	choice.Ring = ringOf(f)
	if !(choice.Ring > LongRing) {
		return choice, nil
	}
	given, err := alone.Realise(rate, filter.Given)
	if err != nil {
		return choice, err
	}
	choice.Phase = filter.IIR
	for _, path := range given.Paths() {
		if path.System.Taps != nil { // a mask, which a recursive filter meets by another curve
			choice.Phase = filter.Minimum
		}
	}
	return choice, nil
}

// ringOf is how long a filter that is one kernel rings; of one that names channels
// the first is meant.
func ringOf(f *filter.Filter) float64 {
	white, pink := figures.RingsFor(f.Paths()[0].System.Taps, float64(f.Rate()))
	return math.Max(white, pink)
}

func (c Choice) String() string {
	return fmt.Sprintf("%s: %s, for it rings %.1f ms", c.Stage, c.Phase, 1e3*c.Ring)
}
