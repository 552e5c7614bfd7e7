package figures

import (
	"math"
	"math/cmplx"
	"math/rand/v2"
	"testing"

	"fettle/filter/response"
)

// Two poles and the all-pass of second order in closed form: of poles re^±jθ, the delay
// is the sum of two one-pole delays (Oppenheim and Schafer, Discrete-Time Signal
// Processing, chapter on transform analysis of systems).
func textbook() []closedForm {
	one := func(float64) float64 { return 1 }
	const r, theta = 0.95, 0.3
	a1, a2 := -2*r*math.Cos(theta), r*r
	twoPole := func(w float64) float64 {
		delay := 0.0
		for _, angle := range []float64{theta, -theta} {
			c := math.Cos(w - angle)
			delay += (r*c - r*r) / (1 - 2*r*c + r*r)
		}
		return delay
	}
	return []closedForm{
		{"two-pole", impulseOf([][6]float64{{1, 0, 0, 1, a1, a2}}, 1000), twoPole,
			func(w float64) float64 {
				return 1 / ((1 - 2*r*math.Cos(w-theta) + r*r) * (1 - 2*r*math.Cos(w+theta) + r*r))
			}},
		{"second-order all-pass", impulseOf([][6]float64{{a2, a1, 1, 1, a1, a2}}, 1000),
			func(w float64) float64 { return 2 + 2*twoPole(w) }, one},
		bessel(),
		shelf(),
	}
}

// bessel is the low-pass of third order with the polynomial s³ + 6s² + 15s + 15, whose delay is
// (6w⁴ + 45w² + 225)/(w⁶ + 6w⁴ + 45w² + 225) (Storch 1954, "Synthesis of constant-time-delay
// ladder networks using Bessel polynomials"), by the bilinear transform s = k·(1-z⁻¹)/(1+z⁻¹):
// w becomes k·tan(ω/2), and the delay is multiplied by its derivative.
func bessel() closedForm {
	const k = 8.0
	root := -2.3 // the polynomial's real one, by Newton's steps; a quadratic is left
	for range 20 {
		root -= (((root+6)*root+15)*root + 15) / ((3*root+12)*root + 15)
	}
	p, q := 6+root, 15+root*(6+root) // s² + ps + q
	first, second := k-root, k*k+p*k+q
	h := impulseOf([][6]float64{
		{-root / first, -root / first, 0, 1, (-root - k) / first, 0},
		{q / second, 2 * q / second, q / second, 1, (2*q - 2*k*k) / second, (k*k - p*k + q) / second},
	}, 2000)
	warped := func(w float64) float64 { return k * math.Tan(w/2) }
	polynomial := func(x float64) float64 { return ((x+6)*x+45)*x + 225 } // of w²
	return closedForm{"Bessel", h,
		func(w float64) float64 {
			x := math.Pow(warped(w), 2)
			return ((6*x+45)*x + 225) / polynomial(x) * (k + x/k) / 2
		},
		func(w float64) float64 { return 225 / polynomial(math.Pow(warped(w), 2)) }}
}

// The shelf's midpoint: a frequency of the curve, for whose group delay the test asks.
const (
	shelfGain   = 12.0 // dB
	shelfMiddle = 1280.0
)

// shelf is a low shelf (Bristow-Johnson, Audio EQ Cookbook, Q 1/√2). Its delay is
// Re{Σ n·b z⁻ⁿ/Σ b z⁻ⁿ} less the same of a.
func shelf() closedForm {
	a := math.Pow(10, shelfGain/40)
	w0 := 2 * math.Pi * shelfMiddle / rate16
	cos, slope := math.Cos(w0), 2*math.Sqrt(a)*math.Sin(w0)/math.Sqrt2
	b := [3]float64{a * ((a + 1) - (a-1)*cos + slope), 2 * a * ((a - 1) - (a+1)*cos), a * ((a + 1) - (a-1)*cos - slope)}
	d := [3]float64{(a + 1) + (a-1)*cos + slope, -2 * ((a - 1) + (a+1)*cos), (a + 1) + (a-1)*cos - slope}
	sums := func(c [3]float64, w float64) (h, nh complex128) {
		for n, v := range c {
			z := cmplx.Rect(v, -w*float64(n))
			h, nh = h+z, nh+complex(float64(n), 0)*z
		}
		return h, nh
	}
	h := impulseOf([][6]float64{{b[0] / d[0], b[1] / d[0], b[2] / d[0], 1, d[1] / d[0], d[2] / d[0]}}, 1000)
	return closedForm{"shelf", h,
		func(w float64) float64 {
			hb, nb := sums(b, w)
			ha, na := sums(d, w)
			return real(nb/hb) - real(na/ha)
		},
		func(w float64) float64 {
			hb, _ := sums(b, w)
			ha, _ := sums(d, w)
			return power(hb) / power(ha)
		}}
}

// Arrival and spread of every band to 0.1 microsecond, the curve's delay to rounding.
func TestTextbookForms(t *testing.T) {
	for _, c := range textbook() {
		f := Measure(Response{H: c.h, Rate: rate16})
		checkCurve(t, c, f.Curve, 0)
		checkBands(t, c, f)
	}
}

// checkBands compares what is stated of bands with the closed form.
func checkBands(t *testing.T, c closedForm, f *Figures) {
	count := 0
	for _, b := range f.Bands {
		if math.IsNaN(b.Arrival) {
			continue
		}
		count++
		mean, spread := overBand(c, b.Band)
		within(t, c.name+" arrival", b.Arrival, (mean-f.Latency)/rate16, 1e-7)
		within(t, c.name+" spread", b.Spread, spread/rate16, 1e-7)
	}
	if count < 20 {
		t.Errorf("%s: %d bands stated", c.name, count)
	}
}

// A cookbook shelf's group delay is exactly 0 at its midpoint, where it turns from
// late to early.
func TestShelfHasNoDelayAtItsMidpoint(t *testing.T) {
	c := shelf()
	curve := Measure(Response{H: c.h, Rate: rate16}).Curve
	for i, hz := range curve.Hz {
		if math.Abs(hz-shelfMiddle) > 1e-6 {
			continue
		}
		within(t, "group delay at the midpoint", curve.GroupDelay[i], 0, 1e-15)
		within(t, "gain at the midpoint", curve.Magnitude[i], shelfGain/2, 1e-9)
		if below, above := curve.GroupDelay[i-24], curve.GroupDelay[i+24]; !(below*above < 0 && math.Abs(below) > 1e-5) {
			t.Errorf("an octave below the midpoint %g s, above %g s; want opposite signs", below, above)
		}
		return
	}
	t.Error("the midpoint is no frequency of the curve")
}

// Kernels of all four types arrive everywhere at (N-1)/2, with no spread, wherever their forced
// zeros are; five of each, seeded. A band about a zero may be too faint to state.
func TestFourTypesArriveAtOnce(t *testing.T) {
	r := rand.New(rand.NewPCG(4, 5))
	for _, c := range []struct {
		name   string
		length int
		sign   float64
	}{{"type I", 31, 1}, {"type II", 30, 1}, {"type III", 31, -1}, {"type IV", 30, -1}} {
		for range 5 {
			h := kernelOf(r, c.length, c.sign)
			middle := float64(c.length-1) / 2
			latency, _ := response.BulkLatency(h, 0, rate16)
			within(t, c.name+" latency", latency, middle, 0)
			s := newSpectrum(h, middle, rate16, 1)
			curve := s.curve(0, 0)
			for i, tau := range curve.GroupDelay {
				if !math.IsNaN(tau) {
					within(t, c.name+" group delay", tau, middle/rate16, 1e-7)
				} else if curve.Magnitude[i] > 10*math.Log10(s.peak)-60 {
					t.Errorf("%s: %g Hz is not stated", c.name, curve.Hz[i])
				}
			}
		}
		f := Measure(Response{H: kernelOf(r, c.length, c.sign), Rate: rate16})
		for _, b := range f.Bands {
			if math.IsNaN(b.Arrival) && b.Gain < -40 {
				continue
			}
			within(t, c.name+" arrival", b.Arrival, 0, 1e-7)
			within(t, c.name+" spread", b.Spread, 0, 1e-7)
		}
	}
}

// kernelOf is a random kernel, symmetric with sign 1 and antisymmetric with -1.
func kernelOf(r *rand.Rand, length int, sign float64) []float64 {
	h := make([]float64, length)
	for i := range length {
		v := r.NormFloat64()
		h[i] += v
		h[length-1-i] += sign * v
	}
	return h
}

// Delays of a whole number of samples and a fraction: windowed sincs, whose passband is
// true to 1e-5 up to 0.45 of the rate.
func TestFractionalDelaysArriveAtOnce(t *testing.T) {
	for _, d := range []float64{-0.45, 0.25, 0.4999} {
		f := Measure(Response{H: fractionalDelay(d, 200), Origin: 200, Rate: rate16})
		for _, b := range f.Bands {
			within(t, "arrival", b.Arrival+f.Latency/rate16, d/rate16, 1e-7)
			within(t, "spread", b.Spread, 0, 1e-7)
		}
	}
}
