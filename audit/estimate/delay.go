package estimate

import (
	"math"

	"gonum.org/v1/gonum/dsp/fourier"
)

// Lag is where the correlation of two signals is largest.
type Lag struct {
	Samples float64 // how much later the second signal is
	// Sign is that of the correlation there: -1 when one is inverted.
	Sign float64
	// Clear is the largest value over the largest outside its own half wave, 1 or
	// more; a tone, whose correlation repeats, has 1.
	Clear float64
}

// transforms are kept: short recordings want thousands of one size.
var transforms = Kept[*fourier.FFT]{Make: fourier.NewFFT}

// LagOf finds the lag between two signals from their weighted cross-spectrum
// conj(X)·Y at bins 0 to size/2 of a transform of even length: the lag t that
// maximises |Σ c[k]·e^(j2πkt/size)|, real part, to well under a thousandth of a sample
// where the spectrum is wide. Weights are the caller's: those of the largest
// likelihood are 1/noise (Knapp and Carter 1976, "The generalized correlation method
// for estimation of time delay"). Lags reach from -size/2 to size/2.
func LagOf(cross []complex128, size int) Lag {
	fft := transforms.Take(size)
	x := fft.Sequence(nil, cross)
	transforms.Give(size, fft)
	best := 0
	for i, v := range x {
		if math.Abs(v) > math.Abs(x[best]) {
			best = i
		}
	}
	top := x[best]
	l := Lag{Sign: math.Copysign(1, top), Clear: math.Abs(top) / outside(x, best)}
	if best > size/2 {
		best -= size
	}
	l.Samples = climb(cross, size, float64(best), l.Sign)
	return l
}

// outside is the largest magnitude of x, which is periodic, outside the half wave
// about an index.
func outside(x []float64, at int) float64 {
	n := len(x)
	from, to := 1, 1
	for from < n && x[(at-from+n)%n]*x[at] > 0 {
		from++
	}
	for to < n && x[(at+to)%n]*x[at] > 0 {
		to++
	}
	var most float64
	for i := to; i <= n-from; i++ {
		most = max(most, math.Abs(x[(at+i)%n]))
	}
	return most
}

// resync is how many steps a rotation by repeated multiplication may run before it is
// set right again: its error grows by about 1e-16 a step.
const resync = 256

// climb finds the maximum of sign·Σ Re(c[k]·e^(j2πkt/size)) within a sample of t
// by Newton's steps.
func climb(cross []complex128, size int, t, sign float64) float64 {
	start := t
	unit := 2 * math.Pi / float64(size)
	for range 20 {
		var slope, curve float64
		sin, cos := math.Sincos(unit * t)
		turn, z := complex(cos, sin), complex128(0)
		for k, c := range cross {
			if k%resync == 0 {
				sin, cos := math.Sincos(unit * t * float64(k))
				z = complex(cos, sin)
			}
			c *= z
			w := unit * float64(k)
			slope -= w * imag(c)
			curve -= w * w * real(c)
			z *= turn
		}
		step := -slope / curve
		if !(sign*curve < 0) || math.Abs(t+step-start) > 1 {
			return t
		}
		t += step
		if math.Abs(step) < 1e-9 {
			return t
		}
	}
	return t
}
