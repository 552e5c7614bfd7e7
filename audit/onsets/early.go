package onsets

import (
	"math"

	"fettle/audit/figures"
)

// EarlyTimes are how long before an onset, in seconds, energy is early: the least
// and the most that sources give for pre-masking, and figures.BeyondTimes.
var EarlyTimes = [4]float64{0.001, 0.002, 0.005, 0.020}

const (
	// Early energy is sought for earlySpan, the background measured in parts before.
	earlySpan = 100e-3
	parts     = 4
	part      = 50e-3
	// doubts is how many times the parts' largest deviation from their mean early
	// energy must exceed to be seen.
	doubts = 2.0
	// mostFloor is the highest floor at which early energy is stated, -20 dB.
	mostFloor = 1e-2
)

// early is what stands ahead of an onset over the background, as shares of the
// onset's energy.
type early struct {
	excess [len(EarlyTimes)]float64
	doubt  [len(EarlyTimes)]float64 // under this, an excess is not seen
}

// earlyAt reads a signal ahead of an onset; false when too little of it is there.
func (s *signal) earlyAt(onset float64) (early, bool) {
	var out early
	begins := onset - earlySpan
	start := begins - parts*part
	if start < float64(s.from)/s.rate {
		return out, false
	}
	var mean, off float64
	var powers [parts]float64
	for i := range powers {
		t := start + float64(i)*part
		powers[i] = s.energy(t, t+part) / part
		mean += powers[i] / parts
	}
	for _, p := range powers {
		off = max(off, math.Abs(p-mean))
	}
	energy := s.energy(onset, onset+attackEnds) - mean*attackEnds
	for i, t := range EarlyTimes {
		long := earlySpan - t
		out.excess[i] = (s.energy(begins, onset-t) - mean*long) / energy
		out.doubt[i] = doubts * off * long / energy
	}
	return out, energy > 0
}

// added is the early energy of a processed signal that the original does not show,
// in dB, and the level under which nothing is seen. What the original shows may
// grow fourfold, re its onset, and still be no more than another balance.
func (e early) added(original early) (levels [len(EarlyTimes)]float64, floor float64) {
	for i, x := range e.excess {
		doubt := e.doubt[i]
		if own := original.excess[i]; own > original.doubt[i] {
			x -= own
			doubt += 3*own + original.doubt[i]
		}
		levels[i] = figures.None
		if x > doubt {
			levels[i] = decibels(x)
		}
		floor = max(floor, doubt)
	}
	return levels, decibels(floor)
}

func decibels(ratio float64) float64 { return max(figures.None, 10*math.Log10(ratio)) }
