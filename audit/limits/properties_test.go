package limits

import (
	"math"
	"slices"
	"testing"

	"fettle/audit/figures"

	"pgregory.net/rapid"
)

// drawn is a subject of any arrivals, some not carried, some not stated.
func drawn(t *rapid.T) Subject {
	s := oneOff(0, 0)
	for i := range s.Figures.Bands {
		b := &s.Figures.Bands[i]
		b.Arrival = rapid.Float64Range(-5e-3, 5e-3).Draw(t, "arrival")
		b.Carried = rapid.IntRange(0, 4).Draw(t, "carried") > 0
		if rapid.IntRange(0, 19).Draw(t, "stated") == 0 {
			b.Arrival = math.NaN()
		}
	}
	return s
}

// mapped has every arrival changed.
func mapped(s Subject, by func(seconds float64) float64) Subject {
	bands := slices.Clone(s.Figures.Bands)
	for i := range bands {
		bands[i].Arrival = by(bands[i].Arrival)
	}
	return OfBands(s.Rate, bands, nil, math.NaN(), math.NaN(), s.Figures.NotStated)
}

func frequencySets() []Limit {
	return slices.DeleteFunc(Sets(), func(l Limit) bool { return l.Range == "" })
}

// A delay common to all bands is no distortion: no verdict sees it.
func TestCommonDelayIsNotSeen(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		s := drawn(t)
		shift := rapid.Float64Range(-1, 1).Draw(t, "shift")
		moved := mapped(s, func(x float64) float64 { return x + shift })
		for i, v := range Judge(moved, frequencySets()) {
			before := Judge(s, frequencySets())[i]
			if len(v.Points) != len(before.Points) {
				t.Fatalf("%s: %d points, then %d", v.Name, len(before.Points), len(v.Points))
			}
			for j, p := range v.Points {
				// 1e-9 ms: arrivals of a second are exact to 2e-16 s.
				if math.Abs(p.Value-before.Points[j].Value) > 1e-9 {
					t.Fatalf("%s: %+v, then %+v", v.Name, before.Points[j], p)
				}
			}
		}
	})
}

// Deviations scale with the arrivals, and so does the use of a limit.
func TestScaling(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		s := drawn(t)
		k := rapid.Float64Range(0.5, 20).Draw(t, "factor")
		scaled := mapped(s, func(x float64) float64 { return k * x })
		for i, v := range Judge(scaled, frequencySets()) {
			before := Judge(s, frequencySets())[i]
			for _, p := range v.Points {
				// A band early by a microsecond or less counts as on time.
				if q, ok := before.at(p.Hz); ok && math.Abs(p.Value-k*q.Value) > 1e-9 {
					t.Fatalf("%s: %+v, then %+v", v.Name, q, p)
				}
			}
			if len(v.Points) == len(before.Points) && len(v.Points) > 0 && math.Abs(v.Used()-k*before.Used()) > 1e-9*(1+v.Used()) {
				t.Fatalf("%s uses %g, then %g with %g", v.Name, before.Used(), v.Used(), k)
			}
		}
	})
}

// Every carried band is judged, uncovered or not stated, and once; outcome and
// margin tell the same.
func TestEveryCarriedBandIsAccountedFor(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		s := drawn(t)
		var carried []float64
		for _, b := range s.Figures.Bands {
			if b.Carried {
				carried = append(carried, b.Nominal)
			}
		}
		for _, v := range Judge(s, frequencySets()) {
			got := slices.Concat(v.Uncovered, v.Unstated)
			for _, p := range v.Points {
				got = append(got, p.Hz)
			}
			slices.Sort(got)
			if !slices.Equal(got, carried) {
				t.Fatalf("%s accounts for %v of %v", v.Name, got, carried)
			}
			if (v.Outcome == Exceeded) != (v.Margin < 0) || (v.Outcome == Exceeded) != (v.Used() > 1) {
				t.Fatalf("%s: %s with a margin of %g, used %g", v.Name, v.Outcome, v.Margin, v.Used())
			}
			if v.Outcome == Within && len(v.Unstated) > 0 {
				t.Fatalf("%s is a pass with %v not stated", v.Name, v.Unstated)
			}
		}
	})
}

// Wider intervals never decide what narrower ones left open.
func TestIntervalsOnlyTakeAway(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		s := drawn(t)
		with := func(half float64) []Verdict {
			errs := make([]figures.BandFigures, len(s.Figures.Bands))
			for i := range errs {
				errs[i].Arrival = half
			}
			return Judge(OfBands(s.Rate, s.Figures.Bands, errs, math.NaN(), math.NaN(), nil), []Limit{must(t, "moller")[0], must(t, "j21")[0]})
		}
		narrow := rapid.Float64Range(0, 1e-3).Draw(t, "narrow")
		wide := narrow + rapid.Float64Range(0, 1e-3).Draw(t, "more")
		after := with(wide)
		for i, v := range with(narrow) {
			if after[i].Outcome != v.Outcome && after[i].Outcome != NotStated {
				t.Fatalf("%s: %s, wider %s", v.Name, v.Outcome, after[i].Outcome)
			}
		}
	})
}

// A gain changes nothing that any limit speaks of.
func TestGainIsNotSeen(t *testing.T) {
	h := []float64{0.1, -0.4, 1, 0.5, -0.2, 0.05, 0.3, -0.1}
	loud := slices.Clone(h)
	for i := range loud {
		loud[i] *= -3.7
	}
	all := append(Sets(), must(t, ownExamples()...)...)
	judged := func(h []float64) []Verdict {
		s := Of(figures.Measure(figures.Response{H: h, Origin: 2, Rate: 48000}), 48000)
		s.Latency, s.TargetError = 2, 0.01
		return Judge(s, all)
	}
	before := judged(h)
	for i, v := range judged(loud) {
		if all[i].Name == "sum-test -3 dB" {
			continue // the sum with the original does depend on gain
		}
		if v.Outcome != before[i].Outcome || math.Abs(v.Worst.Value-before[i].Worst.Value) > 1e-9 {
			t.Errorf("%+v, then %+v", before[i], v)
		}
	}
}
