package design

import (
	"errors"
	"math"
	"slices"
	"testing"

	"pgregory.net/rapid"
)

// drawnBands draws one to four bands of any gains and weights, half of
// rate/taps wide at least, with transitions of one and a half to four and a
// half times rate/taps.
func drawnBands(t *rapid.T) BandSpec {
	s := BandSpec{Taps: rapid.IntRange(8, 140).Draw(t, "taps"), Antisymmetric: rapid.Bool().Draw(t, "antisymmetric"), Rate: 1}
	count := rapid.IntRange(1, 4).Draw(t, "bands")
	widths, gaps := make([]float64, count), make([]float64, count)
	bands, transitions := 0.0, 0.0
	for i := range count {
		widths[i] = rapid.Float64Range(0.2, 5).Draw(t, "width")
		bands += widths[i]
		if i > 0 {
			gaps[i] = rapid.Float64Range(1.5, 4.5).Draw(t, "gap") / float64(s.Taps)
			transitions += gaps[i]
		}
	}
	from, to := 0.0, 0.5
	if s.Antisymmetric {
		from, to = 0.01, 0.49
	}
	unit := (to - from - transitions) / bands
	if !(unit*slices.Min(widths) >= 0.5/float64(s.Taps)) {
		return s // too narrow: no bands
	}
	for i := range count {
		b := Flat(from+gaps[i], from+gaps[i]+widths[i]*unit, float64(i%2), math.Exp(rapid.Float64Range(-3, 3).Draw(t, "weight")))
		from = b.To
		if i == count-1 {
			b.To = to
		}
		if rapid.IntRange(0, 3).Draw(t, "other gain") == 0 {
			b.GainTo = rapid.Float64Range(0, 1).Draw(t, "gain")
		}
		s.Bands = append(s.Bands, b)
	}
	return s
}

// somethingToDesign leaves out bands too narrow to draw, one gain throughout,
// and what Validate refuses, each of which has a test of its own.
func somethingToDesign(s BandSpec) bool {
	if len(s.Bands) == 0 || s.Validate() != nil {
		return false
	}
	_, constant := s.constantGain()
	return !constant
}

// TestRandomBands: whatever is asked, the kernel is the best one by the
// alternation theorem (see TestEqualRipple), or the error is one of those that
// the bands themselves deserve; the exchange never gives up.
func TestRandomBands(t *testing.T) {
	designed, worst := 0, 0.0
	rapid.Check(t, func(t *rapid.T) {
		s := rapid.Custom(drawnBands).Filter(somethingToDesign).Draw(t, "bands")
		taps, deviation, err := ParksMcClellan(s, RemezOptions{})
		if err != nil {
			if errors.Is(err, errStuck) {
				t.Fatalf("%+v: %v", s, err)
			}
			return
		}
		if deviation < 1e-6 {
			return // drowned in what follows
		}
		// Taps that are right to 1e-15 at the extrema of narrow bands far apart
		// are so to some 1e-12 elsewhere, which counts the more the smaller the
		// ripples are.
		within := 1e-6 + 2e-12*math.Exp(3)/deviation
		all := ripplesOf(s, taps)
		count, spread := alternations(all, within)
		if need := s.cosines() + 1; count < need {
			t.Fatalf("%+v: %d alternations of heights equal to %.2g, want %d", s, count, within, need)
		}
		if off := math.Abs(highest(all)/deviation - 1); !(off <= within) {
			t.Fatalf("%+v: measured deviation off by %.3g of the claimed, allowed %.3g", s, off, within)
		}
		designed++
		worst = math.Max(worst, spread)
	})
	t.Logf("%d designs, ripples equal to %.2g", designed, worst)
	if designed == 0 {
		t.Error("nothing was designed")
	}
}
