package page

import (
	"math"
	"strconv"

	"gonum.org/v1/plot"
)

// hertzTicks label 1, 2 and 5 of each decade of frequency, as the trade writes
// them: 50, 200, 1k, 20k.
type hertzTicks struct{}

func (hertzTicks) Ticks(lowest, highest float64) []plot.Tick {
	var out []plot.Tick
	for decade := math.Pow(10, math.Floor(math.Log10(lowest))); decade <= highest; decade *= 10 {
		for step := 1.0; step < 10; step++ {
			hz := decade * step
			if hz < lowest*(1-1e-9) || hz > highest*(1+1e-9) {
				continue
			}
			t := plot.Tick{Value: hz}
			if step == 1 || step == 2 || step == 5 {
				t.Label = shortHertz(hz)
			}
			out = append(out, t)
		}
	}
	return out
}

func shortHertz(hz float64) string {
	if hz >= 1000 {
		return strconv.FormatFloat(hz/1000, 'g', 6, 64) + "k"
	}
	return strconv.FormatFloat(hz, 'g', 6, 64)
}

// evenTicks stand 1, 2 or 5 times a power of ten apart, about six of them.
type evenTicks struct{}

func (evenTicks) Ticks(lowest, highest float64) []plot.Tick {
	step := evenStep(highest - lowest)
	digits := max(0, -int(math.Floor(math.Log10(step)+1e-9)))
	var out []plot.Tick
	for i := math.Ceil(lowest/step - 1e-9); i*step <= highest+1e-9*step; i++ {
		out = append(out, plot.Tick{Value: i * step, Label: fixed(i*step, digits)})
	}
	return out
}

// evenStep divides a range into four to eight.
func evenStep(width float64) float64 {
	power := math.Pow(10, math.Floor(math.Log10(width/4)))
	for _, m := range []float64{5, 2} {
		if width/(power*m) >= 4 {
			return power * m
		}
	}
	return power
}

type namedTicks []plot.Tick

func (t namedTicks) Ticks(_, _ float64) []plot.Tick { return t }

// roundedRange widens a range to whole steps.
func roundedRange(lowest, highest float64) (lo, hi float64) {
	step := evenStep(highest - lowest)
	return math.Floor(lowest/step+1e-9) * step, math.Ceil(highest/step-1e-9) * step
}
