package onsets

import (
	"math"
	"math/rand/v2"
	"slices"
)

const (
	// leastMedian and leastPercentile are the fewest onsets that a median and a 95th
	// percentile are stated of: of fewer than 20 the percentile is the worst.
	leastMedian     = 5
	leastPercentile = 20
	// sampled is how many values of a figure are remembered: of more, a random
	// sample (Vitter 1985, "Random sampling with a reservoir", algorithm R).
	sampled = 1 << 14
)

// Summary is one figure over many onsets. NaN is not stated. Beyond 16,384 onsets
// median and percentile are those of a random sample of as many.
type Summary struct {
	// Count is how many onsets the figure could be stated of.
	Count int
	// Median is signed where the figure is; it wants 5 onsets.
	Median float64
	// Percentile95 is of magnitudes where the figure is signed; it wants 20 onsets.
	Percentile95 float64
	// Worst is the value of the largest magnitude, with its sign, or the highest
	// level; WorstTime is when, in seconds.
	Worst, WorstTime float64
}

// tally gathers the values of one figure in bounded memory.
type tally struct {
	level     bool // or signed
	count     int
	values    []float64
	worst, at float64
	random    *rand.Rand
}

func newTally(level bool) *tally {
	return &tally{level: level, worst: math.NaN(), at: math.NaN(), random: rand.New(rand.NewPCG(1, 1))}
}

// bad is what is largest of the worst value.
func (t *tally) bad(v float64) float64 {
	if t.level {
		return v
	}
	return math.Abs(v)
}

// add takes a value, unless it is not stated.
func (t *tally) add(v, time float64) {
	if math.IsNaN(v) {
		return
	}
	t.count++
	if t.count == 1 || t.bad(v) > t.bad(t.worst) {
		t.worst, t.at = v, time
	}
	if len(t.values) < sampled {
		t.values = append(t.values, v)
	} else if i := t.random.IntN(t.count); i < sampled {
		t.values[i] = v
	}
}

func (t *tally) summary() Summary {
	s := Summary{Count: t.count, Median: math.NaN(), Percentile95: math.NaN(), Worst: t.worst, WorstTime: t.at}
	if t.count >= leastMedian {
		s.Median = t.quantile(slices.Clone(t.values), 0.5)
	}
	if t.count >= leastPercentile {
		bad := make([]float64, len(t.values))
		for i, v := range t.values {
			bad[i] = t.bad(v)
		}
		s.Percentile95 = t.quantile(bad, 0.95)
	}
	return s
}

// quantile sorts x. Signed figures are interpolated between order statistics
// (Hyndman and Fan 1996, "Sample quantiles in statistical packages", definition 7).
// Of levels the higher is taken: between 'none' and a level lies none.
func (t *tally) quantile(x []float64, share float64) float64 {
	slices.Sort(x)
	at := share * float64(len(x)-1)
	below, above := x[int(at)], x[int(math.Ceil(at))]
	if t.level {
		return above
	}
	return below + (at-math.Floor(at))*(above-below)
}
