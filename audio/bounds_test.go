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

// near is g of the phase that gives the waveform at n + t.
func near(t float64) (g window) {
	const n = interpolatorTaps / 2
	for k, c := range interpolator.near {
		g[n-1-k], g[n+k] = c, c
	}
	switch t {
	case 1. / 4:
		g[n-1] += interpolator.tilt
		g[n] -= interpolator.tilt
	case 3. / 4:
		g[n-1] -= interpolator.tilt
		g[n] += interpolator.tilt
	}
	return g
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

// TestOffIsTight: a curve with second differences of ±1 takes h·x as far from g·x
// as Σ|r| says, at n + 2/4 and n + 1/4, and no farther; n + 3/4 mirrors n + 1/4.
// 1e-12 is 24 products of samples that reach 50, and Σ|r| of two running sums.
func TestOffIsTight(t *testing.T) {
	const tolerance = 1e-12
	off := [3]float64{interpolator.sideOff, interpolator.middleOff, interpolator.sideOff}
	for i, h := range phases() {
		g := near(float64(i+1) / TruePeakOversampling)
		x := worstCurve(h, g)
		reached := math.Abs(dot(h, x) - dot(g, x))
		if !(math.Abs(reached-off[i]) <= tolerance) {
			t.Errorf("phase %d: off by %.15g, stated %.15g, allowed %g", i+1, reached, off[i], tolerance)
		}
		t.Logf("phase %d: off by %.6f of the second differences", i+1, reached)
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

// TestBoundsHold: for windows of many kinds, with slack for rounding.
func TestBoundsHold(t *testing.T) {
	r := rand.New(rand.NewPCG(5, 6))
	b, closest := &interpolator.bounds, math.Inf(1)
	for range 20000 {
		var x window
		rough := r.Float64()
		f, phase := r.Float64()/2, 2*math.Pi*r.Float64()
		for k := range x {
			x[k] = rough*r.NormFloat64() + (1-rough)*math.Cos(2*math.Pi*f*float64(k)+phase)
		}
		reach, bent := largest(x[:]), bend(x[:])
		inner := max(math.Abs(x[interpolatorTaps/2-1]), math.Abs(x[interpolatorTaps/2]))
		bound := min(b.norm*reach, inner+b.lift*bent+rounding*reach)
		if got := interpolator.peak(&x); !(got <= bound) {
			t.Fatalf("%v: %g exceeds its bound %g", x, got, bound)
		} else {
			closest = min(closest, bound-got)
		}
	}
	t.Logf("nearest to a bound: %g below it", closest)
}
