package limits

import (
	"math"
	"testing"

	"fettle/audit/figures"
)

const rate = 48000.0

// turned is the phase of a second-order all-pass of centre f0 and quality q,
//
//	-2 atan2(x/q, 1 - x²),  x = tan(pi f/fs)/tan(pi f0/fs)
//
// which is that of the analogue one, bilinearly transformed.
func turned(f, f0, q float64) float64 {
	x := math.Tan(math.Pi*f/rate) / math.Tan(math.Pi*f0/rate)
	return -2 * math.Atan2(x/q, 1-x*x)
}

// allpassArrival is a band's arrival in ms, exactly: |H| being 1, it is the mean
// of the group delay, so the phase lost over the band.
func allpassArrival(b figures.Band, f0, q float64) float64 {
	return 1e3 * (turned(b.Lower, f0, q) - turned(b.Upper, f0, q)) / (2 * math.Pi * (b.Upper - b.Lower))
}

// allpass measures that all-pass; its coefficients are those of the bilinear
// transform, divided out by hand.
func allpass(f0, q float64) Subject {
	k := math.Tan(math.Pi * f0 / rate)
	norm := 1 + k/q + k*k
	a1, a2 := 2*(k*k-1)/norm, (1-k/q+k*k)/norm
	h := make([]float64, 1<<12)
	var x1, x2, y1, y2 float64
	for n := range h {
		x := 0.0
		if n == 0 {
			x = 1
		}
		y := a2*x + a1*x1 + x2 - a1*y1 - a2*y2
		h[n] = y
		x1, x2, y1, y2 = x, x1, y, y1
	}
	return Of(figures.Measure(figures.Response{H: h, Rate: rate}), rate)
}

// qualityFor finds the quality for which a quantity that grows with it is want.
func qualityFor(want float64, of func(q float64) float64) float64 {
	lo, hi := 0.5, 30.0
	for range 100 {
		if mid := (lo + hi) / 2; of(mid) < want {
			lo = mid
		} else {
			hi = mid
		}
	}
	return lo
}

// An all-pass whose quality is chosen, by closed forms only, so that one band
// stands just inside or just outside a threshold.
func TestAllpassAtTheThreshold(t *testing.T) {
	const f0 = 1995.262 // the band called 2 kHz
	deviation := func(q float64) float64 {
		var around []timed
		var own timed
		for _, b := range figures.Bands(rate) {
			x := timed{Band: b, arrival: allpassArrival(b, f0, q) / 1e3}
			around = append(around, x)
			if b.Nominal == 2000 {
				own = x
			}
		}
		m, _, _ := median(own, around)
		return 1e3 * (own.arrival - m)
	}
	const threshold = 1 + (2000-f0)/2000*1.4427*1 // 1 + 1 lg(2000/1995.262)/lg 2, ms
	for _, c := range []struct {
		of   float64
		want Outcome
	}{{0.999, Within}, {1.001, Exceeded}} {
		q := qualityFor(c.of*threshold, deviation)
		v := verdict(t, allpass(f0, q), "audibility")
		if v.Outcome != c.want || v.Worst.Hz != 2000 {
			t.Errorf("Q %.4f: %+v", q, v)
		}
		within(t, "deviation, ms", v.Worst.Value, c.of*threshold, 1e-6)
		within(t, "threshold, ms", v.Worst.Limit, threshold, 1e-5)
	}
}

// The same against a telephone mask, whose bands from 1 kHz on have 0.3 ms.
func TestAllpassAtTheMask(t *testing.T) {
	const f0 = 1584.893
	excess := func(q float64) float64 {
		least, most := math.Inf(1), 0.0
		for _, b := range figures.Bands(rate) {
			if b.Nominal >= 500 && b.Nominal <= 2500 {
				least = min(least, allpassArrival(b, f0, q))
			}
			if b.Nominal >= 1000 && b.Nominal <= 2500 {
				most = max(most, allpassArrival(b, f0, q))
			}
		}
		return most - least
	}
	for _, c := range []struct {
		of   float64
		want Outcome
	}{{0.999, Within}, {1.001, Exceeded}} {
		v := verdict(t, allpass(f0, qualityFor(c.of*0.3, excess)), "exchange")
		if v.Outcome != c.want {
			t.Errorf("%+v", v)
		}
		within(t, "excess, ms", v.Worst.Value, c.of*0.3, 1e-6)
	}
}

// A symmetric kernel delays all bands alike: it is within every mask and every
// threshold with next to 0 ms, however long it rings.
func TestSymmetricKernel(t *testing.T) {
	h := make([]float64, 4001)
	for n := range h { // a ringing at 1 kHz over a flat rest
		x := float64(n - 2000)
		h[n] = 0.01 * math.Exp(-x*x/2e5) * math.Cos(2*math.Pi*1000/rate*x)
	}
	h[2000] += 1
	s := Of(figures.Measure(figures.Response{H: h, Origin: 2000, Rate: rate}), rate)
	for _, set := range Sets() {
		if set.Range == "" { // masking
			continue
		}
		v := Judge(s, []Limit{set})[0]
		if v.Outcome != Within || !(math.Abs(v.Worst.Value) <= 1e-6) {
			t.Errorf("%+v", v)
		}
	}
	// The bell falls by 60 dB in energy within 2000 samples, not within 500.
	if v := verdict(t, s, "pre-masking-10ms"); v.Outcome != Exceeded || !(v.Worst.Value < 2000/48.) {
		t.Errorf("%+v", v)
	}
}
