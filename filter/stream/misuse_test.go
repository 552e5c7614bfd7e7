package stream

import (
	"math"
	"strings"
	"testing"

	"fettle/filter/response"
	"fettle/filter/stream/machine"
)

func TestMisusePanics(t *testing.T) {
	stereo := func() *Delay { return NewDelay(3, 2) }
	for name, c := range map[string]struct {
		call func()
		says string
	}{
		"no taps":            {func() { NewFIR(nil) }, "without taps"},
		"FIR, no channels":   {func() { NewFIR([]float64{1}).Kernel(0, Anything()) }, "0 channels"},
		"delay, no channels": {func() { NewDelay(1, 0) }, "0 channels"},
		"negative delay":     {func() { NewDelay(-1, 1) }, "-1 samples"},
		"no cascade channel": {func() { NewCascade(nil, -1, machine.Best()) }, "-1 channels"},
		"pole on the circle": {func() { NewCascade([]response.Section{{B0: 1}, {B0: 1, A1: -1}}, 1, machine.Best()) }, "section 2 of 2"},
		"poles outside":      {func() { NewCascade([]response.Section{{B0: 1, A2: 1.1}}, 1, machine.Best()) }, "not stable"},
		"NaN":                {func() { NewCascade([]response.Section{{B0: math.NaN()}}, 1, machine.Best()) }, "not finite"},
		"infinity":           {func() { NewCascade([]response.Section{{B0: 1, A1: math.Inf(1)}}, 1, machine.Best()) }, "not finite"},
		"channel missing":    {func() { stereo().Process(planes(2, 4), planes(1, 4)) }, "2 slices out and 1 in"},
		"short output":       {func() { stereo().Process(planes(2, 3), planes(2, 4)) }, "channel 0 has 3 samples out"},
		"uneven input":       {func() { stereo().Process(planes(2, 4), [][]float64{{1, 2, 3, 4}, {1}}) }, "channel 1"},
	} {
		t.Run(name, func(t *testing.T) {
			defer func() {
				if said, _ := recover().(string); !strings.Contains(said, c.says) {
					t.Errorf("panic %q, want one with %q", said, c.says)
				}
			}()
			c.call()
		})
	}
}

// TestProcessDoesNotAllocate covers steps that fill periods and steps that do
// not.
func TestProcessDoesNotAllocate(t *testing.T) {
	sections := []response.Section{lowpass(0.1, 0.7), lowpass(0.1, 0.7), highpass(0.1, 0.7)}
	for name, k := range map[string]Kernel{
		"direct":       NewFIR(noise(30, 9)).Kernel(3, Anything()),
		"overlap-save": NewFIR(noise(31, 300)).Kernel(3, Anything()),
		"cascade":      NewCascade(sections, 3, machine.Best()),
		"delay":        NewDelay(100, 3),
		"series":       Series(NewDelay(100, 3), NewCascade(sections, 3, machine.Best())),
	} {
		x := noisePlanes(32, 3, 5000)
		if got := testing.AllocsPerRun(10, func() { k.Process(x, x) }); got != 0 {
			t.Errorf("%s: %g allocations a call, want none", name, got)
		}
	}
}
