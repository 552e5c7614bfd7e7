package report

import (
	"fmt"
	"math"
	"path/filepath"
	"strings"

	"fettle/audit"
	"fettle/audit/choose"
)

// tablesOf are the tables of a comparison: one more where a recording was heard.
func tablesOf(c *choose.Comparison) []comparisonTable {
	if c.Recording == "" {
		return comparisonTables
	}
	return append(comparisonTables[:len(comparisonTables):len(comparisonTables)], onsetTable)
}

// earlyAt is which of onsets.EarlyTimes a comparison shows: 5 ms, as of the pre-ring.
const earlyAt = 2

var onsetTable = comparisonTable{
	{8, [2]string{"onsets", "found"}, "onsets found", ofOnsets(func(h heard) string { return fmt.Sprint(h.onsets) })},
	{9, [2]string{"lost or", "blurred"}, "onsets lost or blurred", ofOnsets(func(h heard) string { return fmt.Sprint(h.lost) })},
	{10, [2]string{"shift, ms", "median"}, "onset shift, median, ms", ofOnsets(func(h heard) string { return decimal(h.median*toMS, 3) })},
	{10, [2]string{"shift, ms", "worst"}, "onset shift, worst, ms", ofOnsets(func(h heard) string { return decimal(h.shift*toMS, 3) })},
	{12, [2]string{"5 ms ahead", "worst, dB"}, "energy 5 ms ahead of onsets, worst, dB", ofOnsets(func(h heard) string { return strings.TrimSuffix(early(h.early), " dB") })},
}

func ofOnsets(cell func(h heard) string) func(*choose.Candidate, *audit.Result) string {
	return func(n *choose.Candidate, r *audit.Result) string { return cell(heardOf(n, r)) }
}

// heard is what becomes of the onsets of all channels of a recording that one path treats.
// Of each figure it has the worst channel's; NaN: none states it.
type heard struct {
	onsets, lost  int
	median, shift float64 // s, signed
	rise          float64 // s, the worst change, signed
	early         float64 // dB, the worst; see earlyAt
}

// heardOf gathers the channels that a result speaks for.
func heardOf(n *choose.Candidate, r *audit.Result) heard {
	nan := math.NaN()
	h := heard{median: nan, shift: nan, rise: nan, early: nan}
	if n.Onsets == nil {
		return h
	}
	for _, c := range n.Onsets.Channels {
		if !serves(n, r, c.Channel) {
			continue
		}
		h.onsets += c.Onsets
		h.lost += c.Lost + c.Blurred
		h.median = larger(h.median, c.Shift.Median)
		h.shift = larger(h.shift, c.Shift.Worst)
		h.rise = larger(h.rise, c.RiseChange.Worst)
		if worst := c.Early[earlyAt].Worst; !(worst <= h.early) && !math.IsNaN(worst) {
			h.early = worst
		}
	}
	return h
}

// serves tells whether a path treats a channel: by its number, or, of the path of all that no
// stage names, because no other does.
func serves(n *choose.Candidate, r *audit.Result, channel int) bool {
	for _, other := range n.Results {
		if other.Channel == channel {
			return other == r
		}
	}
	return r.Channel == 0
}

// larger is whichever is farther from 0; what is not stated is not.
func larger(a, b float64) float64 {
	if math.IsNaN(a) || math.Abs(b) > math.Abs(a) {
		return b
	}
	return a
}

// onsetsWords says what the table of onsets shows.
func onsetsWords(c *choose.Comparison) string {
	return fmt.Sprintf("Onsets are those of %q, the shift and the energy 5 ms and more ahead of them that of the worst channel; the energy is re the onset's own.", clip(filepath.Base(c.Recording), Width/2))
}

// onsetFields are a row's in CSV; empty without a recording.
func onsetFields(n *choose.Candidate, r *audit.Result) []string {
	h := heardOf(n, r)
	found, lost := "", ""
	if n.Onsets != nil {
		found, lost = fmt.Sprint(h.onsets), fmt.Sprint(h.lost)
	}
	return []string{found, lost, field(h.median * toMS), field(h.shift * toMS), field(h.rise * toMS), field(h.early)}
}
