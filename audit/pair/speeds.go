package pair

import "math"

// speeds are ratios at which copies are commonly made by mistake or on purpose:
// between sample rates, film and video (common practice, no source), and by a few
// per cent.
var speeds = []float64{
	48.0 / 44.1, 44.1 / 48, 2, 0.5, 32.0 / 44.1, 44.1 / 32, 32.0 / 48, 48.0 / 32, 22.05 / 48, 48 / 22.05,
	1001.0 / 1000, 1000.0 / 1001, 25.0 / 24, 24.0 / 25, 25.025 / 24, 24 / 25.025,
	1.005, 0.995, 1.01, 0.99, 1.02, 0.98, 1.03, 0.97,
}

const (
	// clearly is how many standard deviations a correlation of envelopes must stand
	// out: the largest of a million normal numbers is at 5.
	clearly = 7.0
	// clearer is the same for each of many other speeds.
	clearer = 12.0
	// surely is when no other speed need be tried.
	surely = 40.0
	// seen is how many steps another speed must move the end.
	seen = 5.0
	// better is how much clearer another speed must be than none.
	better = 1.5
)

// found is a delay and a speed that fit two envelopes.
type found struct {
	match
	speed float64 // of the second against the first; 1: the same
}

// find tries the same speed first, then others; the one that the lengths suggest among
// them.
func find(a, b *envelope) found {
	best := found{a.against(b, 1), 1}
	if best.clear >= surely {
		return best
	}
	same := best.clear
	ratio := float64(a.frames) / float64(b.frames)
	for _, s := range append([]float64{ratio}, speeds...) {
		steps := math.Abs(s-1) * float64(min(len(a.energy[0]), len(b.energy[0])))
		if steps < seen || s < 0.4 || s > 2.5 {
			continue
		}
		// A copy played s times as fast has its steps 1/s apart.
		m := a.against(b, 1/s)
		if m.clear >= clearer && m.clear > better*same && m.clear > best.clear {
			best = found{m, s}
		}
	}
	return best
}
