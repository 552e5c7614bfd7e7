package design

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"gonum.org/v1/gonum/dsp/fourier"
	"gonum.org/v1/gonum/dsp/window"
)

// windowShapes are the windows without a parameter. Those of package gonum/dsp/window
// are symmetric (their period is n-1), as filter design needs them; their
// coefficients are those of the sources named at Window.
var windowShapes = map[string]func([]float64) []float64{
	"rectangular":      window.Rectangular,
	"bartlett":         window.Triangular,
	"triangular":       triangular,
	"hann":             window.Hann,
	"hamming":          window.Hamming,
	"blackman":         window.Blackman,
	"blackman-harris":  window.BlackmanHarris,
	"nuttall":          window.Nuttall,
	"blackman-nuttall": window.BlackmanNuttall,
	"flat-top":         window.FlatTop,
}

// WindowNames lists what Window knows, in alphabetical order.
func WindowNames() []string {
	names := make([]string, 0, len(windowShapes))
	for name := range windowShapes {
		names = append(names, name)
	}
	slices.Sort(names)
	return names
}

// Window returns the symmetric window of n points, n at least 1, largest in its
// middle. One point is 1. With x = 2 pi i/(n-1):
//
//	rectangular       1
//	bartlett          triangle with 0 at its ends
//	triangular        triangle with 0 one step (n odd) or half a step (n even) beyond its ends
//	hann              0.5 - 0.5 cos x
//	hamming           0.54 - 0.46 cos x
//	blackman          0.42 - 0.5 cos x + 0.08 cos 2x
//	blackman-harris   0.35875 - 0.48829 cos x + 0.14128 cos 2x - 0.01168 cos 3x
//	nuttall           0.355768 - 0.487396 cos x + 0.144232 cos 2x - 0.012604 cos 3x (continuous first derivative)
//	blackman-nuttall  0.3635819 - 0.4891775 cos x + 0.1365995 cos 2x - 0.0106411 cos 3x (least sidelobes of four terms)
//	flat-top          0.21557895 - 0.41663158 cos x + 0.277263158 cos 2x - 0.083578947 cos 3x + 0.006947368 cos 4x
//
// Windows with a parameter: KaiserWindow, GaussianWindow, ChebyshevWindow.
//
// Errors: n under 1; a name not listed here. Sources: Harris, On the use of
// windows for harmonic analysis with the discrete Fourier transform, Proc. IEEE
// 66 (1978) 51-83; Nuttall, Some windows with very good sidelobe behavior, IEEE
// Trans. ASSP-29 (1981) 84-91; the flat-top's coefficients are common practice,
// no source.
func Window(name string, n int) ([]float64, error) {
	shape, known := windowShapes[name]
	if !known {
		return nil, fmt.Errorf("window %q is not known; there are %s", name, strings.Join(WindowNames(), ", "))
	}
	if n < 1 {
		return nil, fmt.Errorf("window %s: %d points is not a window; ask for at least 1", name, n)
	}
	return symmetrical(shape, n), nil
}

// symmetrical evaluates a shape and makes its halves equal to the last bit.
func symmetrical(shape func([]float64) []float64, n int) []float64 {
	w := slices.Repeat([]float64{1}, n)
	if n == 1 {
		return w // n-1 = 0 divides in most formulas
	}
	return mirrored(shape(w), false)
}

func triangular(w []float64) []float64 {
	n := len(w)
	for i := range w {
		steps := float64(2 * (min(i, n-1-i) + 1)) // halves of a step from where the triangle is 0
		if n%2 == 1 {
			w[i] *= steps / float64(n+1)
		} else {
			w[i] *= (steps - 1) / float64(n)
		}
	}
	return w
}

// GaussianWindow returns exp(-t^2/(2 sigma^2)), t in samples from the middle of
// n points; n at least 1, sigma above 0. Panics otherwise. Source: Harris (1978).
func GaussianWindow(n int, sigma float64) []float64 {
	if n < 1 || !(sigma > 0) {
		panic(fmt.Sprintf("design: no Gaussian window of %d points with sigma %g", n, sigma))
	}
	// gonum counts sigma in halves of n-1.
	return symmetrical(window.Gaussian{Sigma: sigma / (float64(n-1) / 2)}.Transform, n)
}

// ChebyshevWindow returns the window of n points with the narrowest main lobe
// whose sidelobes are all rejectDB under it, its middle at 1 (even n: its two
// middle points). n at least 1, rejectDB above 0 and at most 300; panics
// otherwise. Its transform is a Chebyshev polynomial of degree n-1, whose
// samples are transformed back.
//
// Source: Dolph, Proc. IRE 34 (1946) 335-348; Harris (1978), section on the
// Dolph-Chebyshev window.
func ChebyshevWindow(n int, rejectDB float64) []float64 {
	if n < 1 || !(rejectDB > 0 && rejectDB <= 300) {
		panic(fmt.Sprintf("design: no Chebyshev window of %d points and %g dB", n, rejectDB))
	}
	if n == 1 {
		return []float64{1}
	}
	degree := float64(n - 1)
	x0 := math.Cosh(math.Acosh(fromDB(rejectDB)) / degree)
	spectrum := make([]complex128, n/2+1)
	for k := range spectrum {
		// The transform is real about the middle of the window, (n-1)/2.
		angle := math.Pi * float64(k) / float64(n)
		value := chebyshev(degree, x0*math.Cos(angle))
		sin, cos := math.Sincos(-angle * degree)
		spectrum[k] = complex(value*cos, value*sin)
	}
	w := mirrored(fourier.NewFFT(n).Sequence(nil, spectrum), false)
	divide(w, slices.Max(w))
	return w
}

// chebyshev is the polynomial of the first kind, for x >= -1.
func chebyshev(degree, x float64) float64 {
	if x > 1 {
		return math.Cosh(degree * math.Acosh(x))
	}
	return math.Cos(degree * math.Acos(x))
}
