package onsets

import (
	"cmp"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"fettle/audit/figures"
)

func tallied(level bool, values ...float64) Summary {
	t := newTally(level)
	for i, v := range values {
		t.add(v, float64(i))
	}
	return t.summary()
}

// Definition 7 of Hyndman and Fan: the p-quantile of 1..n is 1 + p(n-1).
func TestQuantiles(t *testing.T) {
	for _, n := range []int{20, 21, 1000} {
		var x []float64
		for _, i := range rand.New(rand.NewPCG(1, 1)).Perm(n) {
			x = append(x, float64(i+1))
		}
		s := tallied(false, x...)
		within(t, "median", s.Median, 1+0.5*float64(n-1), 1e-9)
		within(t, "95th percentile", s.Percentile95, 1+0.95*float64(n-1), 1e-9)
		within(t, "worst", s.Worst, float64(n), 0)
		within(t, "its place", s.WorstTime, float64(slices.Index(x, float64(n))), 0)
	}
}

// A signed figure has a signed median and worst, its percentile is of magnitudes;
// what is not stated does not count.
func TestSignedSummary(t *testing.T) {
	x := []float64{math.NaN()}
	for i := range 21 {
		x = append(x, -float64(i))
	}
	s := tallied(false, x...)
	if s.Count != 21 || s.Median != -10 || s.Percentile95 != 19 || s.Worst != -20 || s.WorstTime != 21 {
		t.Errorf("%+v", s)
	}
}

// Between 'none' and a level lies none: the higher is taken.
func TestSummaryOfLevels(t *testing.T) {
	x := slices.Repeat([]float64{figures.None, -40}, 10)
	s := tallied(true, append(x, figures.None, -30)...)
	if s.Count != 22 || s.Median != -40 || s.Percentile95 != -40 || s.Worst != -30 {
		t.Errorf("%+v", s)
	}
	if s := tallied(true, slices.Repeat([]float64{figures.None}, 20)...); s.Median != figures.None || s.Worst != figures.None {
		t.Errorf("none: %+v", s)
	}
}

// Of very many values a sample is kept: memory stays, count and worst are exact, and
// quantiles within four standard errors, √(p(1-p)/16384).
func TestSummaryOfVeryMany(t *testing.T) {
	r := rand.New(rand.NewPCG(3, 3))
	tl := newTally(false)
	const n = 1_000_000
	for i := range n {
		tl.add(r.Float64(), float64(i))
	}
	tl.add(-2, n)
	if len(tl.values) != sampled {
		t.Errorf("%d values are kept", len(tl.values))
	}
	s := tl.summary()
	if s.Count != n+1 || s.Worst != -2 || s.WorstTime != n {
		t.Errorf("%+v", s)
	}
	within(t, "median", s.Median, 0.5, 4*0.5/128)
	within(t, "95th percentile", s.Percentile95, 0.95, 4*0.218/128)
}

// The list in bounded memory is that of all onsets at once.
func TestRanking(t *testing.T) {
	r := rand.New(rand.NewPCG(5, 5))
	for range 20 {
		count, apart, channels := 1+r.IntN(6), r.Float64(), 1+r.IntN(2)
		ranked := newRanking(count, apart, channels)
		var all []Onset
		for at := 0.0; at < 100; at += quiet * (1 + 3*r.Float64()) {
			for c := range channels {
				o := Onset{Channel: c + 1, Time: at, Level: -60*r.Float64() + 10*math.Sin(at/5)}
				all = append(all, o)
				ranked.add(o)
			}
		}
		want := greedy(all, count, apart)
		got := ranked.list()
		same := slices.EqualFunc(got, want, func(a, b Onset) bool { return a.Time == b.Time && a.Channel == b.Channel })
		if !same || len(got) == 0 {
			t.Errorf("%d apart by %g: %v, want %v", count, apart, got, want)
		}
		if cap(ranked.onsets) > 5*ranked.most {
			t.Errorf("room for %d onsets, %d would do", cap(ranked.onsets), ranked.most)
		}
	}
}

// greedy takes the strongest that is not too near one taken, again and again.
func greedy(all []Onset, count int, apart float64) (taken []Onset) {
	left := slices.Clone(all)
	for len(taken) < count && len(left) > 0 {
		best := slices.MaxFunc(left, func(a, b Onset) int { return cmp.Compare(a.Level, b.Level) })
		taken = append(taken, best)
		left = slices.DeleteFunc(left, func(o Onset) bool {
			return o == best || math.Abs(o.Time-best.Time) < apart || (apart == 0 && o == best)
		})
	}
	return taken
}

// The strongest come first, by level and not by place, and no two too near.
func TestStrongest(t *testing.T) {
	const rate = 16000
	x := silence(rate, 8)
	levels := map[float64]float64{1: 0.1, 2: 0.5, 2.2: 0.4, 4: 0.3, 6: 0.2}
	for at, level := range levels {
		tone(x, rate, 2000, at, func(t float64) float64 { return level * math.Exp(-t/0.01) })
	}
	got, err := Strongest(source(rate, x), 3, 0.5)
	if err != nil || len(got) != 3 {
		t.Fatalf("%d onsets, %v", len(got), err)
	}
	for i, at := range []float64{2, 4, 6} {
		within(t, "time", got[i].Time, at, 0.1e-3)
		if i > 0 && got[i].Level >= got[i-1].Level {
			t.Errorf("levels %g, %g", got[i-1].Level, got[i].Level)
		}
	}
	if near, _ := Strongest(source(rate, x), 3, 0); len(near) != 3 || math.Abs(near[1].Time-2.2) > 0.1e-3 {
		t.Errorf("as near as may be: %v", near)
	}
	if none, err := Strongest(source(rate, x), 0, 1); len(none) != 0 || err != nil {
		t.Errorf("none: %v, %v", none, err)
	}
}
