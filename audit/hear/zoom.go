package hear

import (
	"math"

	"fettle/audit/onsets"
)

// Spans of a zoom, in seconds. Where a filter rings earlier than leastShown, it is shown
// from a quarter earlier than that on.
const (
	leastShown  = 15e-3
	mostShown   = 400e-3
	beyondLead  = 1.25
	shareBehind = 0.5 // of what is shown ahead, behind the onset
)

// Zoom is the onset's channel about the onset, in the original and in each output as
// they are, not matched in level.
type Zoom struct {
	Rate float64 // Hz
	// First is when the first sample is, in seconds after the onset.
	First    float64
	Original []float64
	Outputs  []ZoomOutput // as Excerpts.Outputs
}

// ZoomOutput is one realisation's.
type ZoomOutput struct {
	Samples []float64 // as many as the original's, at the same instants
	// Before and After are how much to show of them ahead of the onset and behind it,
	// in seconds.
	Before, After float64
}

func newZoom(c *cuts, s span, at onsets.Onset, ways []Way) Zoom {
	rate := float64(s.recorded)
	onset := at.Time*rate - float64(s.from) // in frames of the cut
	z := Zoom{Rate: rate}
	before, after := leastShown, leastShown
	for _, w := range ways {
		shown := min(max(leastShown, beyondLead*w.Lead), mostShown)
		if math.IsNaN(shown) {
			shown = leastShown
		}
		o := ZoomOutput{Before: shown, After: max(leastShown, shareBehind*shown)}
		before, after = max(before, o.Before), max(after, o.After)
		z.Outputs = append(z.Outputs, o)
	}
	first := max(0, int64(math.Ceil(onset-before*rate)))
	end := min(s.frames, int64(math.Floor(onset+after*rate))+1)
	z.First = (float64(first) - onset) / rate
	channel := []int{at.Channel}
	part := func(frames []float64) []float64 {
		return picked(frames, c.channels, channel)[first:end]
	}
	z.Original = part(c.original)
	for i, y := range c.outputs {
		z.Outputs[i].Samples = part(y)
	}
	return z
}
