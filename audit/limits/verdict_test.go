package limits

import (
	"math"
	"slices"
	"strconv"
	"strings"
	"testing"

	"fettle/audit/figures"
)

// One band off, all others on time: its deviation is what it is off by. Limits
// between points are lg-interpolated by hand at the exact centres 10^(n/10).
func TestAudibilityByHand(t *testing.T) {
	nan := math.NaN()
	for _, c := range []struct {
		name    string
		hz, ms  float64
		outcome Outcome
		limit   float64 // NaN: the band has none
	}{
		{"late, under the line", 630, 2.797, Within, 2.79726}, // 3.2 - 1.2 lg(630.957/500)/lg 2
		{"late, over the line", 630, 2.798, Exceeded, 2.79726},
		{"late, under a point", 1000, 1.999, Within, 2},
		{"late, over a point", 1000, 2.001, Exceeded, 2},
		{"early, under the line", 1000, -1.199, Within, -1.2},
		{"early, over the line", 1000, -1.201, Exceeded, -1.2},
		{"late, in the band of 8 kHz", 8000, 1.996, Exceeded, 1.99487}, // 1.5 + 0.5 lg(7943.28/4000)/lg 2
		{"late, above the range", 10000, 50, Within, nan},
		{"late, below the range", 400, 50, Within, nan},
		{"early, below the range of early ones", 800, -50, Within, nan},
		{"early, in the band of 12 kHz", 12500, -1.201, Exceeded, -1.2},
		{"early, above that", 16000, -50, Within, nan},
	} {
		v := verdict(t, oneOff(c.hz, c.ms), "audibility")
		if v.Outcome != c.outcome || v.Fails() != (c.outcome == Exceeded) {
			t.Errorf("%s: %s, fails %v", c.name, v.Outcome, v.Fails())
		}
		if early := strings.HasPrefix(c.name, "early, below"); slices.Contains(v.Early, c.hz) != early {
			t.Errorf("%s: early bands without a limit are %v", c.name, v.Early)
		}
		p, ok := v.at(c.hz)
		if ok == math.IsNaN(c.limit) || ok == slices.Contains(v.Uncovered, c.hz) {
			t.Errorf("%s: judged %v, uncovered %v", c.name, ok, v.Uncovered)
		}
		if !ok {
			continue
		}
		within(t, c.name, p.Value, c.ms, 1e-9)
		within(t, c.name, p.Limit, c.limit, 1e-5)
		if v.Worst != p || v.Unit != "ms" {
			t.Errorf("%s: the worst is %+v", c.name, v.Worst)
		}
		within(t, c.name+", margin", v.Margin, math.Abs(c.limit)-math.Abs(c.ms), 1e-5)
		within(t, c.name+", used", v.Used(), c.ms/c.limit, 1e-5)
	}
}

// Without a deviation every band that has a threshold is within it, and what
// has none is said: for early bands too.
func TestOnTime(t *testing.T) {
	v := verdict(t, oneOff(0, 0), "audibility")
	want := []float64{20, 25, 31.5, 40, 50, 63, 80, 100, 125, 160, 200, 250, 315, 400, 16000}
	if v.Outcome != Within || !slices.Equal(v.Uncovered, want) || len(v.Points) != 15 || v.Unstated != nil {
		t.Errorf("%+v", v)
	}
}

// The neighbours of a band are those one to two octaves away, ends included.
func TestMedianByHand(t *testing.T) {
	// Around 1 kHz: 250 315 400 500 and 2000 2500 3150 4000 Hz, whose median is
	// the mean of 4 and 5; nearer and farther bands do not count.
	arrivals := map[float64]float64{250: 9, 315: 1, 400: 2, 500: 8, 2000: 7, 2500: 3, 3150: 4, 4000: 5,
		200: 90, 630: 90, 800: 90, 1000: 6, 1250: 90, 1600: 90, 5000: 90}
	s := thirds(func(f float64) float64 { return arrivals[f] })
	p, _ := verdict(t, s, "moller").at(1000)
	within(t, "6 less (4 + 5)/2, ms", p.Value, 1.5, 1e-9)
}

func TestCircuitsByHand(t *testing.T) {
	// 10 ms everywhere is no excess; 63 Hz lies on the first slope of J.21:
	// 55 - 31 lg(63.0957/40)/lg(75/40) = 32.523 ms.
	s := thirds(func(f float64) float64 {
		switch f {
		case 63:
			return 10 + 30
		case 1000:
			return 10 + 16 // limit 24 - 16 lg(1000/75)/lg(14000/75) = 16.0746
		case 20:
			return 500 // not of the table
		}
		return 10
	})
	v := verdict(t, s, "j21")
	for _, c := range []struct{ hz, value, limit float64 }{{63, 30, 32.5234}, {1000, 16, 16.07464}, {40, 0, 55}, {16000, 0, 12}} {
		p, ok := v.at(c.hz)
		if !ok {
			t.Fatalf("%g Hz is not judged", c.hz)
		}
		within(t, "excess", p.Value, c.value, 1e-9)
		within(t, "limit", p.Limit, c.limit, 1e-3)
	}
	if v.Outcome != Within || v.Worst.Hz != 1000 || !slices.Equal(v.Uncovered, []float64{20, 25, 31.5}) {
		t.Errorf("%+v", v)
	}
	if len(v.Points) != 27 {
		t.Errorf("%d bands are judged", len(v.Points))
	}
	// One band less late: the others are as much later than it.
	early := oneOff(250, -60)
	if v := verdict(t, early, "j21"); v.Outcome != Exceeded || v.Fails() {
		t.Errorf("from memory: %s, fails %v", v.Outcome, v.Fails())
	}
	// The mask of an exchange: 0.3 ms from 1 kHz on, where 0.9 ends.
	for _, c := range []struct {
		hz, ms float64
		want   Outcome
	}{{500, 1.79, Within}, {500, 1.81, Exceeded}, {630, 0.91, Exceeded}, {800, 0.89, Within}, {1000, 0.31, Exceeded}, {2500, 0.29, Within}, {3150, 9, Within}} {
		v := verdict(t, oneOff(c.hz, c.ms), "exchange")
		if v.Outcome != c.want || v.Fails() != (c.want == Exceeded) {
			t.Errorf("%g ms at %g Hz: %s", c.ms, c.hz, v.Outcome)
		}
	}
	// Two points and nothing between: in the bands that hold 604 and 2804 Hz.
	v = verdict(t, oneOff(630, 1.51), "cfr-1755")
	if v.Outcome != Exceeded || len(v.Points) != 2 || v.Points[0].Hz != 630 || v.Points[1].Hz != 2500 {
		t.Errorf("%+v", v)
	}
}

// Nothing outside a table is a pass.
func TestOutsideTheRange(t *testing.T) {
	low := oneOff(20, 300)
	for i := range low.Figures.Bands {
		low.Figures.Bands[i].Carried = low.Figures.Bands[i].Nominal < 200
	}
	v := verdict(t, low, "audibility")
	if v.Outcome != NoLimit || v.Fails() || len(v.Points) != 0 || len(v.Uncovered) != 10 || !math.IsNaN(v.Margin) || !math.IsNaN(v.Worst.Value) {
		t.Errorf("%+v", v)
	}
	if v := verdict(t, low, "m1020"); v.Outcome != NoLimit {
		t.Errorf("%+v", v)
	}
}

// Bands that are not carried neither fail nor count, nor are they uncovered.
func TestOnlyCarriedBandsCount(t *testing.T) {
	s := oneOff(1000, 40)
	for i := range s.Figures.Bands {
		b := &s.Figures.Bands[i]
		b.Carried = b.Nominal >= 300 && b.Nominal < 7000 && b.Nominal != 1000
	}
	for _, name := range []string{"audibility", "j21"} {
		v := verdict(t, s, name)
		if v.Outcome != Within || v.Worst.Value != 0 || slices.Contains(v.Uncovered, 20) {
			t.Errorf("%+v", v)
		}
	}
}

// What the figures do not state is never a pass.
func TestNotStated(t *testing.T) {
	gone := oneOff(0, 0)
	gone.Figures.Bands[20].Arrival = math.NaN() // 2 kHz
	gone.Figures.NotStated["bands[2000 Hz]"] = "the dog ate it"
	for _, name := range []string{"audibility", "j21", "exchange"} {
		v := verdict(t, gone, name)
		if v.Outcome != NotStated || v.Reason != "the dog ate it" || !slices.Equal(v.Unstated, []float64{2000}) || v.Fails() {
			t.Errorf("%+v", v)
		}
		if len(v.Points) == 0 || math.IsNaN(v.Margin) {
			t.Errorf("%s: what is stated is not judged: %+v", name, v)
		}
	}
	// But what exceeds, exceeds.
	gone.Figures.Bands[18].Arrival = 0.1
	if v := verdict(t, gone, "audibility"); v.Outcome != Exceeded || v.Reason != "" || !slices.Equal(v.Unstated, []float64{2000}) {
		t.Errorf("%+v", v)
	}

	alone := oneOff(0, 0)
	for i := range alone.Figures.Bands {
		alone.Figures.Bands[i].Carried = alone.Figures.Bands[i].Nominal == 1000
	}
	for name, why := range map[string]string{"audibility": "one to two octaves away", "j21": "no second band"} {
		if v := verdict(t, alone, name); v.Outcome != NotStated || !strings.Contains(v.Reason, why) {
			t.Errorf("%+v", v)
		}
	}

	silent := Of(figures.Measure(figures.Response{H: make([]float64, 10), Rate: 48000}), 48000)
	for _, l := range append(Sets(), must(t, ownExamples()...)...) {
		v := Judge(silent, []Limit{l})[0]
		if v.Outcome != NotStated || v.Reason == "" || v.Fails() || len(v.Points) > 0 {
			t.Errorf("silence: %+v", v)
		}
	}
	none := identity()
	for i := range none.Figures.Bands {
		none.Figures.Bands[i].Carried = false
	}
	for _, name := range []string{"audibility", "g712"} {
		if v := verdict(t, none, name); v.Outcome != NotStated || v.Reason != "no band is carried" {
			t.Errorf("%+v", v)
		}
	}
}

// ownExamples has each measure with its example.
func ownExamples() []string {
	var out []string
	for _, m := range Measures() {
		out = append(out, m.Name+"="+m.Example)
	}
	return out
}

// An identity keeps every limit, by name or by example, or has none.
func TestIdentityKeepsAll(t *testing.T) {
	for _, v := range Judge(identity(), append(Sets(), must(t, ownExamples()...)...)) {
		if v.Outcome != Within || v.Status == Own && v.Source != "the command line" {
			t.Errorf("%+v", v)
		}
	}
}

// Each bound is held against its figure, inclusively, in its unit.
func TestOwnLimits(t *testing.T) {
	ring := func(base float64) figures.Ring {
		column := func(base float64) figures.RingColumn {
			return figures.RingColumn{Level: -base, Length: base / 1e3, Beyond: [3]float64{-base - 1, -base - 2, -base - 3}}
		}
		return figures.Ring{White: column(base), Pink: column(base + 10)}
	}
	s := identity()
	f := s.Figures
	f.PreRing, f.PostRing = ring(30), ring(50)
	f.Pink, f.White = figures.Smear{Total: 5e-3, Magnitude: 4e-3, Phase: 3e-3}, figures.Smear{Total: 2e-3, Magnitude: 1e-3, Phase: 1.7e-3}
	f.DelaySpread, f.Lead, f.PhaseDeviation, f.SumTest = 7e-3, 8e-3, 255.3, -4
	s.Latency, s.TargetError = 960, 0.09
	f.Bands[3].Arrival, f.Bands[5].PhaseDeviation = -6e-3, 255.3 // 40 and 63 Hz

	for _, c := range []struct {
		text    string
		value   float64
		weights string
		hz      float64 // 0: the whole
	}{
		{"pre-ring=%s dB", -30, "white", 0},
		{"pre-ring=%s dB pink", -40, "pink", 0},
		{"pre-ring=%s dB white", -30, "white", 0},
		{"pre-ring=%s dB beyond 2 ms", -31, "white", 0},
		{"pre-ring=%s dB beyond 5 ms", -32, "white", 0},
		{"pre ring = %s dB beyond 0.02 s pink", -43, "pink", 0},
		{"pre-ring=%s ms", 40, "pink", 0},
		{"pre-ring=%s ms white", 30, "white", 0},
		{"post-ring=%s dB", -50, "white", 0},
		{"post-ring=%s dB beyond 5 ms pink", -62, "pink", 0},
		{"post-ring=%s ms", 60, "pink", 0},
		{"smear=%s ms", 5, "pink", 0},
		{"smear=%s ms white", 2, "white", 0},
		{"phase share=%s ms", 3, "pink", 0},
		{"phase-share=%s ms white", 1.7, "white", 0},
		{"delay spread=%s ms", 7, "", 40},
		{"delay-spread=%s ms", 7, "", 40},
		{"lead=%s ms", 8, "", 0},
		{"latency=%s ms", 20, "", 0},
		{"phase deviation=%s degrees", 255.3, "", 63},
		{"sum test=%s dB", -4, "", 0},
		{"target-error=%s dB", 0.09, "", 0},
	} {
		check := func(bound float64, want Outcome) {
			t.Helper()
			text := strings.Replace(c.text, "%s", strconv.FormatFloat(bound, 'g', -1, 64), 1)
			v := verdict(t, s, text)
			if v.Outcome != want || v.Status != Own || v.Worst.Weights != c.weights {
				t.Errorf("%s: %+v", text, v)
			}
			within(t, text, v.Worst.Value, c.value, 1e-9)
			within(t, text+", limit", v.Worst.Limit, bound, 1e-9)
			if c.hz == 0 != math.IsNaN(v.Worst.Hz) || c.hz > 0 && v.Worst.Hz != c.hz {
				t.Errorf("%s: at %g Hz", text, v.Worst.Hz)
			}
		}
		// Levels of rings are stricter below; of all others less is better, a loss
		// counting by its size.
		stricter := c.value - 0.01*math.Abs(c.value)
		looser := c.value + 0.01*math.Abs(c.value)
		if strings.HasPrefix(c.text, "sum") {
			stricter, looser = looser, stricter
		}
		check(c.value, Within)
		check(looser, Within)
		check(stricter, Exceeded)
	}
}

// A bound in samples is as long as the rate has it.
func TestSamples(t *testing.T) {
	s := identity()
	s.Figures.DelaySpread = 2e-3
	for rate, want := range map[float64]Outcome{48000: Within, 47999: Within, 48001: Exceeded, 96000: Exceeded} {
		s.Rate = rate
		v := verdict(t, s, "delay-spread=96 samples")
		if v.Outcome != want {
			t.Errorf("%g Hz: %s", rate, v.Outcome)
		}
		within(t, "limit, ms", v.Worst.Limit, 96e3/rate, 1e-12)
	}
	s.Latency, s.Rate = 12.5, 16000
	if v := verdict(t, s, "latency=12.5 samples"); v.Outcome != Within {
		t.Errorf("%+v", v)
	}
}

// What was measured is within a limit with its whole interval, or beyond it
// with its whole interval, or not stated.
func TestIntervals(t *testing.T) {
	measured := func(ms, half float64) Subject {
		s := oneOff(1000, ms)
		errs := slices.Clone(s.Figures.Bands)
		for i := range errs {
			errs[i].Arrival = 0.02e-3
			if errs[i].Nominal == 1000 {
				errs[i].Arrival = half / 1e3
			}
		}
		return OfBands(48000, s.Figures.Bands, errs, ms/1e3, half/1e3, nil)
	}
	for _, c := range []struct {
		ms, half      float64
		set, ownBound Outcome
	}{
		{1.5, 0.3, Within, Within},     // 1.5 + 0.3 + 0.02 under 2
		{1.69, 0.3, NotStated, Within}, // the neighbours' 0.02 reaches across
		{1.71, 0.3, NotStated, NotStated},
		{2.29, 0.3, NotStated, NotStated},
		{2.31, 0.3, NotStated, Exceeded},
		{2.33, 0.3, Exceeded, Exceeded},
		{2.01, math.NaN(), NotStated, Exceeded}, // an interval that is not known is left out
	} {
		s := measured(c.ms, c.half)
		if v := verdict(t, s, "audibility"); v.Outcome != c.set || v.Outcome == NotStated && !strings.Contains(v.Reason, "interval") {
			t.Errorf("%g ± %g ms: %+v", c.ms, c.half, v)
		}
		if v := verdict(t, s, "delay spread=2 ms"); v.Outcome != c.ownBound {
			t.Errorf("%g ± %g ms: %+v", c.ms, c.half, v)
		}
	}
	// Late or early, it cannot be told, is judged where there is a threshold.
	v := verdict(t, measured(-0.01, 0.1), "flanagan")
	if p, ok := v.at(1000); !ok || p.Limit != 1.6 || v.Outcome != Within {
		t.Errorf("%+v", v)
	}
	if v := verdict(t, measured(-0.13, 0.1), "flanagan"); !slices.Contains(v.Uncovered, 1000) {
		t.Errorf("%+v", v)
	}
}

// A pair states arrivals and delay spread only.
func TestOfBands(t *testing.T) {
	s := OfBands(48000, identity().Figures.Bands, nil, 1e-3, math.NaN(), map[string]string{"sum_test": "no such test of a pair"})
	for _, l := range must(t, ownExamples()...) {
		v := Judge(s, []Limit{l})[0]
		want := NotStated
		if strings.HasPrefix(l.Name, "delay-spread") {
			want = Within
		}
		if v.Outcome != want {
			t.Errorf("%+v", v)
		}
	}
	if v := verdict(t, s, "sum-test=-3 dB"); v.Reason != "no such test of a pair" {
		t.Errorf("%+v", v)
	}
}

// Failures and advice are told apart, and the nearest limit is found over units.
func TestFailedAndNearest(t *testing.T) {
	s := oneOff(1000, 1.9)
	s.Figures.DelaySpread, s.Figures.SumTest = 1.9e-3, -2
	s.Figures.PreRing.White.Beyond[1], s.Figures.PreRing.Pink.Beyond[1] = -66, -70
	all := Judge(s, must(t, "g712", "audibility", "delay spread=1 ms", "sum test=-3 dB", "pre-ring=-60 dB beyond 5 ms", "lead=1 ms"))
	failed := Failed(all)
	if len(failed) != 1 || failed[0].Name != "delay-spread 1 ms" {
		t.Errorf("failed: %+v", failed)
	}
	for i, want := range []float64{1.9 / 0.25, 0.95, 1.9, 2. / 3, math.Pow(10, -6./20), math.NaN()} {
		if got := all[i].Used(); !(math.Abs(got-want) <= 1e-9) && !(math.IsNaN(want) && math.IsNaN(got)) {
			t.Errorf("%s uses %g, want %g", all[i].Name, got, want)
		}
	}
	if n, ok := Nearest(all); !ok || n.Name != "g712" {
		t.Errorf("nearest: %+v", n)
	}
	if n, ok := Nearest(all[1:2]); !ok || n.Name != "audibility" {
		t.Errorf("nearest: %+v", n)
	}
	if _, ok := Nearest(all[5:]); ok {
		t.Error("what is not stated is nearest")
	}
}
