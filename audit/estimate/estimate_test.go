package estimate

import (
	"math"
	"math/cmplx"
	"math/rand/v2"
	"testing"

	"fettle/audit/figures"
)

func within(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if diff := math.Abs(got - want); !(diff <= tol) {
		t.Errorf("%s: got %.10g, want %.10g, off by %.3g, allowed %.3g", what, got, want, diff, tol)
	}
}

// leaveOneOut applies a figure to a sample and to it without each of its values.
func leaveOneOut(x []float64, figure func([]float64) float64) (whole float64, without []float64) {
	for i := range x {
		rest := append(append([]float64(nil), x[:i]...), x[i+1:]...)
		without = append(without, figure(rest))
	}
	return figure(x), without
}

func mean(x []float64) float64 {
	var sum float64
	for _, v := range x {
		sum += v
	}
	return sum / float64(len(x))
}

// Of a mean the jackknife is the textbook interval, mean ± t·s/√n. Student's t at 97.5 %: 4.303 for two
// degrees of freedom, 2.776 for four (any printed table).
func TestJackknifeOfMean(t *testing.T) {
	for _, c := range []struct {
		x    []float64
		s, t float64
	}{
		{[]float64{1, 2, 6}, math.Sqrt(7), 4.303},
		{[]float64{-2, -1, 0, 1, 2}, math.Sqrt(2.5), 2.776},
	} {
		value, half := Jackknife(leaveOneOut(c.x, mean))
		within(t, "value", value, mean(c.x), 1e-12)
		within(t, "half width", half, c.t*c.s/math.Sqrt(float64(len(c.x))), 5e-4*half)
	}
	if value, half := Jackknife(3, []float64{1}); value != 3 || !math.IsNaN(half) {
		t.Errorf("one repeat: %g ± %g, want 3 and no interval", value, half)
	}
	if value, half := Jackknife(3, []float64{1, math.NaN(), 2}); !math.IsNaN(value) || !math.IsNaN(half) {
		t.Errorf("a NaN among the repeats: %g ± %g", value, half)
	}
}

// The square of a mean contains the variance of the mean; its jackknife value is the mean of
// the products of different repeats, which does not.
func TestJackknifeTakesNoiseOutOfEnergy(t *testing.T) {
	x := []float64{0.3, -1.2, 2.5, 0.9}
	value, _ := Jackknife(leaveOneOut(x, func(y []float64) float64 { return mean(y) * mean(y) }))
	var products float64
	for i := range x {
		for j := range x {
			if i != j {
				products += x[i] * x[j] / 12
			}
		}
	}
	within(t, "mean product", value, products, 1e-12)
}

// Intervals hold the truth in 95 % of cases: within 4 standard deviations of a binomial over
// 4000 trials, ±1.4 %. Where degrees of freedom are estimated from the same few numbers,
// they err to the wide side: 2 % more.
func TestJackknifeCoverage(t *testing.T) {
	for _, c := range []struct {
		name        string
		sigma       []float64
		least, most float64
	}{
		{"3 even", []float64{1, 1, 1}, 0.936, 0.964},
		{"8 even", []float64{1, 1, 1, 1, 1, 1, 1, 1}, 0.936, 0.97},
		{"12 even", []float64{1, 1, 1, 1, 1, 1, 1, 1, 1, 1, 1, 1}, 0.936, 0.97},
		{"12 uneven", []float64{1, 1, 1, 1, 1, 2, 2, 2, 4, 4, 1, 1}, 0.93, 0.985},
	} {
		r := rand.New(rand.NewPCG(11, 0))
		held := 0
		const trials = 4000
		for range trials {
			x := make([]float64, len(c.sigma))
			for i, s := range c.sigma {
				x[i] = s * r.NormFloat64()
			}
			if value, half := Jackknife(leaveOneOut(x, mean)); math.Abs(value) <= half {
				held++
			}
		}
		share := float64(held) / trials
		t.Logf("%s: %.3f", c.name, share)
		if !(share >= c.least && share <= c.most) {
			t.Errorf("%s: %.3f of the intervals hold the truth, want %.3f to %.3f", c.name, share, c.least, c.most)
		}
	}
}

func TestRootOf(t *testing.T) {
	for _, c := range []struct{ square, half, root, rootHalf float64 }{
		{4, 0.4, 2, 2 - math.Sqrt(3.6)},
		{1, 2, 1, 1},
		{0, 0.25, 0, 0.5},
		{-3, 0.25, 0, 0.5}, // noise made it negative: the interval must not vanish
	} {
		root, half := RootOf(c.square, c.half)
		within(t, "root", root, c.root, 1e-12)
		within(t, "half width", half, c.rootHalf, 1e-12)
	}
}

func TestDecibels(t *testing.T) {
	level, half, _, stated := Decibels(1e-3, 5e-4)
	if !stated {
		t.Error("a level well above its interval is not stated")
	}
	within(t, "level", level, -30, 1e-12)
	within(t, "half width", half, 10*math.Log10(2), 1e-12)
	if _, _, under, stated := Decibels(1e-6, 9e-6); stated || math.Abs(under+50) > 1e-9 {
		t.Errorf("swamped: stated %t, under %g dB; want not stated, under -50", stated, under)
	}
	if level, half, _, stated := Decibels(0.1, math.NaN()); !stated || math.Abs(level+10) > 1e-12 || !math.IsNaN(half) {
		t.Errorf("no interval: %g ± %g, stated %t", level, half, stated)
	}
}

// The first of the four sets of Anscombe (1973), "Graphs in statistical analysis", The
// American Statistician 27(1): slope 0.500, standard error 0.118, residual standard
// deviation 1.237; Student's t for nine degrees of freedom is 2.262.
func TestFitLine(t *testing.T) {
	x := []float64{10, 8, 13, 9, 11, 14, 6, 4, 12, 7, 5}
	y := []float64{8.04, 6.95, 7.58, 8.81, 8.33, 9.96, 7.24, 4.26, 10.84, 4.82, 5.68}
	l := FitLine(x, y)
	within(t, "slope", l.Slope, 0.500, 5e-4)
	within(t, "at 0", l.At0, 3.00, 5e-3)
	within(t, "half width", l.SlopeHalf, 2.262*0.118, 2e-3)
	within(t, "scatter", l.Scatter, 1.237, 5e-4)
	if l := FitLine([]float64{0, 2}, []float64{1, 2}); l.Slope != 0.5 || !math.IsNaN(l.SlopeHalf) {
		t.Errorf("two points: slope %g ± %g", l.Slope, l.SlopeHalf)
	}
}

// The cross-spectrum of a signal with itself, delayed by a known phase, gives that
// delay whatever its sign and fraction (seen elsewhere as worst near half a sample).
func TestLagOf(t *testing.T) {
	const size = 1024
	r := rand.New(rand.NewPCG(5, 5))
	for _, delay := range []float64{0, 0.1, 0.4999, 0.5, 0.9, -0.3, 17.25, -200.75, 500.5} {
		for _, sign := range []float64{1, -1} {
			cross := make([]complex128, size/2+1)
			for k := 1; k < 450; k++ {
				cross[k] = cmplx.Rect(sign*(1+r.Float64()), -2*math.Pi*float64(k)*delay/size)
			}
			l := LagOf(cross, size)
			within(t, "lag", l.Samples, delay, 1e-7)
			if l.Sign != sign {
				t.Errorf("delay %g: sign %g, want %g", delay, l.Sign, sign)
			}
			if !(l.Clear > 2) {
				t.Errorf("delay %g: clear by %g only", delay, l.Clear)
			}
		}
	}
	tone := make([]complex128, size/2+1)
	tone[20] = 1
	if l := LagOf(tone, size); !(l.Clear < 1.001) {
		t.Errorf("a tone's lag is clear by %g, want 1", l.Clear)
	}
}

// Package figures computes the same by another road: quadrature of direct sums.
func TestBandsAgainstFigures(t *testing.T) {
	const rate = 8000
	r := rand.New(rand.NewPCG(3, 9))
	h := make([]float64, 900)
	for n := range h {
		h[n] = r.NormFloat64() * math.Exp(-math.Abs(float64(n-300))/40)
	}
	f := figures.Measure(figures.Response{H: h, Origin: 250, Rate: rate})
	s := Transform(h, 250, rate)
	latency, polarity := s.Latency()
	within(t, "latency", latency, f.Latency, 1e-6)
	if polarity != f.Polarity {
		t.Errorf("polarity %d, want %d", polarity, f.Polarity)
	}
	for _, b := range f.Bands {
		own := s.Band(b.Band)
		// 24 bins in the narrowest band; the cubic rule's error falls with the fourth power.
		within(t, "gain", 10*math.Log10(own.Power), b.Gain, 1e-4)
		within(t, "arrival", own.Arrival-latency/rate, b.Arrival, 1e-6*0.0375)
		within(t, "spread", math.Sqrt(own.Spread2), b.Spread, 2e-4*b.Spread)
	}
	for i, hz := range f.Curve.Hz {
		v, delay := s.At(hz)
		if math.IsNaN(f.Curve.GroupDelay[i]) || hz < 200 {
			continue
		}
		within(t, "magnitude", 20*math.Log10(cmplx.Abs(v)), f.Curve.Magnitude[i], 0.02) // nearest bin: half a step off
		within(t, "group delay", delay/rate, f.Curve.GroupDelay[i], 2e-4)
	}
}
