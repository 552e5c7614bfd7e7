package figures

import (
	"math"
	"math/cmplx"
	"math/rand/v2"
	"sync"

	"fettle/filter/response"

	"gonum.org/v1/gonum/dsp/fourier"
)

const (
	rate48 = 48000.0
	rate16 = 16000.0
	rate8  = 8000.0
)

// openTop as the upper corner makes a high-pass.
var openTop = math.Inf(1)

// butterworth is the impulse response of a low-pass (lo 0), a high-pass (hi openTop) or a
// band-pass of the given prototype order, which is even, by the bilinear transform of the textbook poles
// e^(jπ(2k+n-1)/2n) (Oppenheim and Schafer, Discrete-Time Signal Processing,
// chapter on IIR design). It is built here, section by section, so that
// the figures are checked against nothing else of this project.
func butterworth(order int, lo, hi, rate float64, length int) []float64 {
	x := make([]float64, length)
	x[0] = 1
	for _, p := range butterworthPoles(order, lo, hi, rate) {
		if imag(p) > 0 {
			section(x, p, lo == 0, math.IsInf(hi, 1))
		}
	}
	normalise(x, lo, hi, rate)
	return x
}

func butterworthPoles(order int, lo, hi, rate float64) []complex128 {
	warp := func(f float64) float64 { return 2 * math.Tan(math.Pi*f/rate) }
	var poles []complex128
	for k := 1; k <= order; k++ {
		p := cmplx.Rect(1, math.Pi*float64(2*k+order-1)/float64(2*order))
		switch {
		case lo == 0:
			poles = append(poles, p*complex(warp(hi), 0))
		case math.IsInf(hi, 1):
			poles = append(poles, complex(warp(lo), 0)/p)
		default: // s -> (s² + w0²)/(s·bw): two poles for each of the prototype's
			bw, w0 := warp(hi)-warp(lo), math.Sqrt(warp(hi)*warp(lo))
			half := p * complex(bw/2, 0)
			root := cmplx.Sqrt(half*half - complex(w0*w0, 0))
			poles = append(poles, half+root, half-root)
		}
	}
	for i, p := range poles {
		poles[i] = (2 + p) / (2 - p)
	}
	return poles
}

// section filters x by a pole pair and two zeros: both at half the rate, both at DC, or one at each.
func section(x []float64, p complex128, lowPass, highPass bool) {
	a1, a2 := -2*real(p), power(p)
	b1, b2 := 0.0, -1.0
	switch {
	case lowPass:
		b1, b2 = 2, 1
	case highPass:
		b1, b2 = -2, 1
	}
	var x1, x2, y1, y2 float64
	for i, v := range x {
		y := v + b1*x1 + b2*x2 - a1*y1 - a2*y2
		x2, x1, y2, y1 = x1, v, y1, y
		x[i] = y
	}
}

// normalise makes the gain 1 at DC, half the rate, or the band's digital centre.
func normalise(x []float64, lo, hi, rate float64) {
	f := 0.0
	switch {
	case math.IsInf(hi, 1):
		f = rate / 2
	case lo > 0:
		f = math.Atan(math.Sqrt(math.Tan(math.Pi*lo/rate)*math.Tan(math.Pi*hi/rate))) * rate / math.Pi
	}
	h, _ := transformAt(x, 0, f, rate)
	gain := 1 / cmplx.Abs(h)
	for i := range x {
		x[i] *= gain
	}
}

// poleDelay is the group delay, in samples at w radians a sample, of poles and as many
// zeros on the unit circle at 1 or -1, half a sample each.
func poleDelay(poles []complex128, w float64) float64 {
	delay := float64(len(poles)) / 2
	for _, p := range poles {
		z := p * turn(-w)
		delay += real(z / (1 - z))
	}
	return delay
}

// zeroPhase is the response with the magnitude of x and no phase, from -half to +half.
func zeroPhase(x []float64, half int) []float64 {
	n := fastLength(16 * len(x))
	h := response.Spectrum(x, n)
	for k, c := range h {
		h[k] = complex(cmplx.Abs(c), 0)
	}
	y := inverse(h, n)
	out := make([]float64, 2*half+1)
	for i := range out {
		// Made symmetric to the last bit: the inverse transform is so to rounding only.
		m := max(half-i, i-half)
		out[i] = (y[m] + y[(n-m)%n]) / 2
	}
	return out
}

// inverse is the real sequence of length n whose transform is c.
func inverse(c []complex128, n int) []float64 {
	x := fourier.NewFFT(n).Sequence(nil, c)
	for i := range x {
		x[i] /= float64(n)
	}
	return x
}

// powers is the response of a one-pole: gain·a^n.
func powers(gain, a float64, length int) []float64 {
	x := make([]float64, length)
	for n := range x {
		x[n] = gain
		gain *= a
	}
	return x
}

// allpass is the response of (c + z^-1)/(1 + c·z^-1).
func allpass(c float64, length int) []float64 {
	return append([]float64{c}, powers(1-c*c, -c, length-1)...)
}

func delta(at, length int) []float64 {
	x := make([]float64, length)
	x[at] = 1
	return x
}

func scaled(x []float64, by float64) []float64 {
	y := make([]float64, len(x))
	for i, v := range x {
		y[i] = by * v
	}
	return y
}

// decaying is a reproducible noise that dies away: a response of no symmetry.
func decaying(seed uint64, length int) []float64 {
	r := rand.New(rand.NewPCG(seed, 1))
	x := make([]float64, length)
	for n := range x {
		x[n] = r.NormFloat64() * math.Exp(-6*float64(n)/float64(length))
	}
	return x
}

// The high-pass of the reference values, order 4 at 70 Hz, as the IIR (which is minimum
// phase) and as a linear-phase kernel of 16385 taps, measured once.
var (
	highPassIIR    = sync.OnceValue(func() *Figures { return at48(butterworth(4, 70, openTop, rate48, 1<<14), 0) })
	highPassLinear = sync.OnceValue(func() *Figures {
		return at48(zeroPhase(butterworth(4, 70, openTop, rate48, 1<<14), 1<<13), 1<<13)
	})
)

// at48 measures h at 48 kHz.
func at48(h []float64, origin int) *Figures {
	return Measure(Response{H: h, Origin: origin, Rate: rate48})
}

// at8 measures h at 8 kHz, where transforms are short.
func at8(h []float64, origin int) *Figures {
	return Measure(Response{H: h, Origin: origin, Rate: rate8})
}

// within fails unless got is within tol of want; NaN fails.
func within(t checker, what string, got, want, tol float64) {
	t.Helper()
	if diff := math.Abs(got - want); !(diff <= tol) {
		t.Errorf("%s: got %.10g, want %.10g, off by %.3g, allowed %.3g", what, got, want, diff, tol)
	}
}

// checker is what *testing.T and *rapid.T share.
type checker interface {
	Helper()
	Errorf(format string, args ...any)
}
