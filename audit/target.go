package audit

import (
	"math"

	"fettle/audit/figures"
	"fettle/filter"
	"fettle/filter/design"
)

// Target is what |H| was to be, in dB at each frequency of a curve: the value
// aimed at, and between what the chain's tolerance lets it lie. Where a range of
// values will do, Aim is that of them nearest to |H|; Low is -Inf where deeper is
// free.
type Target struct{ Aim, Low, High []float64 }

// targetOf takes the tolerance as a share of the target, and lets an error lie 80 dB
// under its greatest value (design.FloorDB).
func targetOf(f *filter.Filter, p *filter.Path, c figures.Curve) Target {
	hz := c.Hz
	share := math.Pow(10, f.Chain().Tolerance/20) - 1
	low, high := make([]float64, len(hz)), make([]float64, len(hz))
	var top float64
	for i, v := range hz {
		low[i], high[i] = f.TargetAt(p, v)
		top = max(top, high[i])
	}
	floor := top * math.Pow(10, design.FloorDB/20.0)
	var t Target
	for i := range hz {
		t.Aim = append(t.Aim, min(max(c.Magnitude[i], decibels(low[i])), decibels(high[i])))
		t.Low = append(t.Low, decibels(low[i]*(1-share)-floor))
		t.High = append(t.High, decibels(high[i]*(1+share)+floor))
	}
	return t
}

func decibels(amplitude float64) float64 { return 20 * math.Log10(max(0, amplitude)) }
