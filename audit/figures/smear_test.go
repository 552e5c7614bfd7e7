package figures

import (
	"math"
	"math/rand/v2"
	"testing"
)

// small is a rate at which transforms are short: white smear in samples does not depend on it.
const small = 1000.0

// inSamples squares a smear given in seconds into samples².
func inSamples(seconds, rate float64) float64 { return seconds * seconds * rate * rate }

// Moments of published examples: Cohen 1995, Time-Frequency Analysis, chapter 1, gives the
// identities; the values were computed with numpy 1.24, the second for scipy.signal.butter(4, 0.1).
func TestSmearAgainstMoments(t *testing.T) {
	for _, c := range []struct {
		name                    string
		h                       []float64
		total, magnitude, phase float64
	}{
		{"five taps", []float64{1, 2, -1, 0.5, 0.25}, 0.552494853, 0.137982329, 0.414512524},
		{"butter(4, 0.1)", butterworth(4, 0, 0.05*small, small, 2000), 11.773016546, 9.093613448, 2.679403098},
	} {
		s := Measure(Response{H: c.h, Rate: small}).White
		// The published values have nine decimals.
		within(t, c.name+" total", inSamples(s.Total, small), c.total, 1e-9*c.total+5e-10)
		within(t, c.name+" magnitude share", inSamples(s.Magnitude, small), c.magnitude, 1e-9*c.magnitude+5e-10)
		within(t, c.name+" phase share", inSamples(s.Phase, small), c.phase, 1e-9*c.phase+5e-10)
	}
}

func TestSmearTotalIsTheTimeMoment(t *testing.T) {
	for seed := range uint64(25) {
		h := decaying(seed, 20+int(seed)*7)
		var e, m1, m2 float64
		for n, v := range h {
			e += v * v
			m1 += float64(n) * v * v
		}
		for n, v := range h {
			off := float64(n) - m1/e
			m2 += off * off * v * v
		}
		got := inSamples(Measure(Response{H: h, Rate: small}).White.Total, small)
		within(t, "total", got, m2/e, 1e-9*m2/e)
	}
}

// h = a^n: the variance of n under a^2n is q/(1-q)² with q = a²; with a·sin w/D = Σ aⁿ sin nw and
// a·sin w/D² = Σ n·aⁿ sin nw/(1-q), D = 1 - 2a·cos w + q, the magnitude share is q/2(1-q)²: half.
func TestSmearOfOnePole(t *testing.T) {
	for _, a := range []float64{-0.6, 0.3, 0.9} {
		s := Measure(Response{H: powers(1, a, 1000), Rate: small}).White
		total := a * a / math.Pow(1-a*a, 2)
		within(t, "total", inSamples(s.Total, small), total, 1e-9*total)
		within(t, "magnitude share", inSamples(s.Magnitude, small), total/2, 1e-9*total)
		within(t, "phase share", inSamples(s.Phase, small), total/2, 1e-9*total)
	}
}

// The group delay of a first-order all-pass is a Poisson kernel, 1 + 2Σ(-c)^k cos kw: its
// variance is 2c²/(1-c²), all of it phase.
func TestSmearOfAllpass(t *testing.T) {
	for _, c := range []float64{-0.5, 0.2, 0.8} {
		s := Measure(Response{H: allpass(c, 500), Rate: small}).White
		want := 2 * c * c / (1 - c*c)
		within(t, "phase share", inSamples(s.Phase, small), want, 1e-9*want)
		within(t, "magnitude share", inSamples(s.Magnitude, small), 0, 1e-9*want)
	}
}

// Symmetric kernels have no phase share, zeros on the unit circle or not.
func TestSmearOfSymmetricKernels(t *testing.T) {
	r := rand.New(rand.NewPCG(7, 7))
	worst := 0.0
	for range 300 {
		h := symmetricWithZeros(r)
		s := newSpectrum(h, float64(len(h)-1)/2, small, 1)
		s.moments()
		for _, m := range []Smear{s.smear(s.white), s.smear(s.pink)} {
			share := m.Phase / m.Total
			within(t, "phase share of the whole", share, 0, 1e-9)
			worst = max(worst, share)
		}
	}
	t.Logf("largest phase share %.2g of the whole, allowed 1e-9", worst)
}

// symmetricWithZeros is a product of sections 1 - 2cos(w)z^-1 + z^-2 (zeros on the unit circle)
// and of a random symmetric part.
func symmetricWithZeros(r *rand.Rand) []float64 {
	h := make([]float64, 1+2*r.IntN(8))
	for i := range (len(h) + 1) / 2 {
		h[i] = r.NormFloat64()
		h[len(h)-1-i] = h[i]
	}
	for range 1 + r.IntN(6) {
		h = newConvolver([]float64{1, -2 * math.Cos(math.Pi*r.Float64()), 1}, len(h)).of(h)
	}
	for i := range len(h) / 2 {
		h[len(h)-1-i] = h[i] // the transform rounds
	}
	return h
}

func TestSmearSplitDoesNotDependOnTransformLength(t *testing.T) {
	for name, h := range map[string][]float64{
		"high-pass": butterworth(4, 20, openTop, 4000, 4000),
		"noise":     decaying(3, 300),
		"one-pole":  powers(1, 0.9, 400),
	} {
		r := Response{H: h, Rate: 4000}
		once, twice := measure(r, 1), measure(r, 2)
		within(t, name+" white magnitude", twice.White.Magnitude, once.White.Magnitude, 1e-6*once.White.Total)
		within(t, name+" white phase", twice.White.Phase, once.White.Phase, 1e-6*once.White.Total)
		within(t, name+" pink magnitude", twice.Pink.Magnitude, once.Pink.Magnitude, 1e-6*once.Pink.Total)
		within(t, name+" pink phase", twice.Pink.Phase, once.Pink.Phase, 1e-6*once.Pink.Total)
		within(t, name+" latency", twice.Latency, once.Latency, 1e-5)
		within(t, name+" phase deviation", twice.PhaseDeviation, once.PhaseDeviation, 1e-3)
	}
}

// Values of an independent numerical trial of the definitions, 48 kHz, two or three digits.
func TestSmearReference(t *testing.T) {
	minimum, linear := highPassIIR().Pink, highPassLinear().Pink
	t.Logf("pink smear: linear %.5f ms, minimum %.5f ms", linear.Total*1e3, minimum.Total*1e3)
	within(t, "linear, ms", linear.Total*1e3, 1.12, 0.005)
	within(t, "minimum, ms", minimum.Total*1e3, 2.05, 0.005)
	within(t, "one magnitude share", minimum.Magnitude, linear.Magnitude, 1e-6*linear.Total)
}

func TestShortestHolding(t *testing.T) {
	for _, c := range []struct {
		h     []float64
		share float64
		want  int
	}{
		{[]float64{1}, 0.9, 0},
		{[]float64{1, 1, 1, 1, 1, 1, 1, 1, 1, 1.001}, 0.9, 8},
		{[]float64{3, 0, 0, 1}, 0.9, 0},
		{[]float64{3, 0, 0, 1}, 0.95, 3},
		{[]float64{0.1, 2, 2, 0.1}, 0.99, 1},
	} {
		if got := shortestHolding(c.h, c.share); got != c.want {
			t.Errorf("%v, %g: %d samples, want %d", c.h, c.share, got, c.want)
		}
	}
}
