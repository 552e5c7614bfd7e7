package audio

import (
	"math"
	"math/rand/v2"
	"testing"
)

// phases are the taps at n + 1/4, n + 2/4 and n + 3/4.
func phases() (h [3]window) {
	for i := range h {
		h[i] = designPhase(float64(i+1) / TruePeakOversampling)
	}
	return h
}

func dot(h, x window) (sum float64) {
	for k := range h {
		sum += h[k] * x[k]
	}
	return sum
}

// of is a sketch's g at n + t.
func (s *sketch) of(t float64) window {
	switch odd := s.odd; t {
	case 1. / 4:
		return taps(s.even, odd)
	case 3. / 4:
		return taps(s.even, [nearPairs]float64{-odd[0], -odd[1], -odd[2]})
	}
	return taps(s.middle, [nearPairs]float64{})
}

// straight is the straight line between the inner pair, at t.
func straight(t float64) (g window) {
	g[interpolatorTaps/2-1], g[interpolatorTaps/2] = 1-t, t
	return g
}

// worstCurve has second differences of ±1 that make the most of h - g, which has
// to be 0 for constants and ramps; the inner pair is 0.
func worstCurve(h, g window) (x window) {
	const n = interpolatorTaps / 2
	gain := func(x window) float64 { return dot(h, x) - dot(g, x) }
	for k := 1; k < len(x)-1; k++ { // the second difference at k alone: a ramp outwards from it
		var hinge window
		for i := range hinge {
			if k < n {
				hinge[i] = max(0, float64(k-i))
			} else {
				hinge[i] = max(0, float64(i-k))
			}
		}
		sign := math.Copysign(1, gain(hinge))
		for i := range x {
			x[i] += sign * hinge[i]
		}
	}
	return x
}

// TestOffIsTight: at each of the points, samples of ±1 take h·x as far from the rough
// g·x as is stated, and a curve with second differences of ±1 from the bent one;
// n + 3/4 mirrors n + 1/4. 1e-12 is 24 products of samples that reach 50, and Σ|r| of
// two running sums.
func TestOffIsTight(t *testing.T) {
	for i, h := range phases() {
		at := float64(i+1) / TruePeakOversampling
		rough, bent := &interpolator.rough, &interpolator.bent
		mustReach(t, "rough", i, rough, h, worstSigns(h, rough.of(at)), rough.of(at))
		mustReach(t, "bent", i, bent, h, worstCurve(h, bent.of(at)), bent.of(at))
	}
}

func mustReach(t *testing.T, name string, i int, s *sketch, h, x, g window) {
	t.Helper()
	const tolerance = 1e-12
	stated := [3]float64{s.sideOff, s.middleOff, s.sideOff}[i]
	reached := math.Abs(dot(h, x) - dot(g, x))
	if !(math.Abs(reached-stated) <= tolerance) {
		t.Errorf("phase %d, %s: off by %.15g, stated %.15g, allowed %g", i+1, name, reached, stated, tolerance)
	}
	t.Logf("phase %d, %s: off by %.6f", i+1, name, reached)
}

// worstSigns are samples of ±1 that make the most of h - g.
func worstSigns(h, g window) (x window) {
	for k := range x {
		x[k] = math.Copysign(1, h[k]-g[k])
	}
	return x
}

// TestBentIsSmooth: h - g of the bent sketch makes nothing of constants and ramps,
// as the bound by second differences supposes. 1e-14 is 24 products up to 12.
func TestBentIsSmooth(t *testing.T) {
	const tolerance = 1e-14
	for i, h := range phases() {
		g := interpolator.bent.of(float64(i+1) / TruePeakOversampling)
		var one, ramp window
		for k := range one {
			one[k], ramp[k] = 1, float64(k)-11.5
		}
		for name, x := range map[string]window{"a constant": one, "a ramp": ramp} {
			if off := dot(h, x) - dot(g, x); !(math.Abs(off) <= tolerance) {
				t.Errorf("phase %d, %s: off by %g, allowed %g", i+1, name, off, tolerance)
			}
		}
	}
}

// TestLiftIsTight: the same curve, on a constant, lifts n + 2/4 as far above the
// inner pair as lift says; the other phases stay below. 1e-12 as above.
func TestLiftIsTight(t *testing.T) {
	const tolerance = 1e-12
	most := 0.
	for i, h := range phases() {
		x := worstCurve(h, straight(float64(i+1)/TruePeakOversampling))
		for k := range x {
			x[k]++
		}
		most = max(most, math.Abs(dot(h, x))-1)
	}
	if !(math.Abs(most-interpolator.lift) <= tolerance) {
		t.Errorf("lifted by %.15g of the second differences, stated %.15g, allowed %g", most, interpolator.lift, tolerance)
	}
}

// TestBoundsHold: for windows of many kinds, with slack for rounding: no point is
// above the bound for all, and none is farther from a sketch than stated.
func TestBoundsHold(t *testing.T) {
	r := rand.New(rand.NewPCG(5, 6))
	b, closest := &interpolator.bounds, math.Inf(1)
	bentOnes, each := 0, phases()
	for range 20000 {
		var x window
		rough := r.Float64() * r.Float64()
		f, phase := r.Float64()/2, 2*math.Pi*r.Float64()
		for k := range x {
			x[k] = rough*r.NormFloat64() + (1-rough)*math.Cos(2*math.Pi*f*float64(k)+phase)
		}
		reach, bend := largest(x[:]), bending(x[:])
		bound := b.most(reach, bend)
		if got := interpolator.peak(&x); !(got <= bound) {
			t.Fatalf("%v: %g exceeds its bound %g", x, got, bound)
		} else {
			closest = min(closest, bound-got)
		}
		s, slack := b.sketch(reach, bend)
		if s == &b.bent {
			bentOnes++
		}
		for i, h := range each {
			off := math.Abs(dot(h, x) - dot(s.of(float64(i+1)/TruePeakOversampling), x))
			if allowed := [3]float64{slack.side, slack.middle, slack.side}[i]; !(off <= allowed) {
				t.Fatalf("%v, phase %d: %g from the sketch, allowed %g", x, i+1, off, allowed)
			}
		}
	}
	if bentOnes < 1000 || bentOnes > 19000 {
		t.Errorf("the bent sketch is chosen %d times of 20000: one is hardly tested", bentOnes)
	}
	t.Logf("nearest to a bound: %g below it", closest)
}

// bending is the largest magnitude of a second difference.
func bending(x []float64) (bend float64) {
	for i := 2; i < len(x); i++ {
		bend = max(bend, math.Abs(x[i]-2*x[i-1]+x[i-2]))
	}
	return bend
}
