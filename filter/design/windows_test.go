package design

import (
	"fmt"
	"math"
	"slices"
	"testing"

	"fettle/filter/response"
)

// shapeOf makes the window of a fixture.
func shapeOf(t *testing.T, c firCase) []float64 {
	t.Helper()
	switch c.Window {
	case "gaussian":
		return GaussianWindow(c.N, c.Parameter)
	case "chebyshev":
		return ChebyshevWindow(c.N, c.Parameter)
	}
	return windowOf(t, c.Window, c.N)
}

// TestWindows compares with the symmetric windows of scipy.signal.windows; so
// it also settles that the period of those taken from gonum is n-1. The
// Chebyshev window is a sum of n terms as large as 10^(rejection/20) before it
// is scaled, the others are evaluated singly.
func TestWindows(t *testing.T) {
	seen := map[string]bool{}
	for _, c := range loadFIR(t).Windows {
		seen[c.Window] = true
		w := shapeOf(t, c)
		if d := worstTap(t, w, c.Taps); !(d <= 1e-12) {
			t.Errorf("%s, %d points, %g: off by %.3g, allowed 1e-12", c.Window, c.N, c.Parameter, d)
		}
		mirror := slices.Clone(w)
		slices.Reverse(mirror)
		if !slices.Equal(w, mirror) {
			t.Errorf("%s, %d points: not symmetric to the last bit", c.Window, c.N)
		}
	}
	for _, name := range WindowNames() {
		if !seen[name] {
			t.Errorf("%s has no reference", name)
		}
	}
}

// TestSidelobes: highest sidelobes as Harris (1978), table 1, prints them
// (rectangular -13, triangle -27, Hann -32, Hamming -43, exact to the decibel
// printed) and Nuttall (1981), from memory: -93.32 dB and -98.17 dB for his two
// four-term windows, as -92 dB for Harris's; a Chebyshev window has the one asked for.
func TestSidelobes(t *testing.T) {
	const n = 1001
	for name, want := range map[string]float64{"rectangular": -13.3, "bartlett": -26.5, "hann": -31.5, "hamming": -42.7,
		"blackman": -58.1, "blackman-harris": -92.0, "nuttall": -93.3, "blackman-nuttall": -98.2} {
		near(t, name, sidelobe(windowOf(t, name, n)), want, 0.3)
	}
	near(t, "chebyshev", sidelobe(ChebyshevWindow(n, 77)), -77, 1e-3)
}

// sidelobe is the greatest level beyond the first minimum, in dB.
func sidelobe(w []float64) float64 {
	spectrum := response.Spectrum(w, 1<<16)
	level := func(i int) float64 { return math.Hypot(real(spectrum[i]), imag(spectrum[i])) }
	i := 1
	for level(i+1) < level(i) {
		i++
	}
	top := 0.0
	for ; i < len(spectrum); i++ {
		top = math.Max(top, level(i))
	}
	return toDB(top / level(0))
}

// TestSincUnder compares with scipy.signal.firwin under every window.
func TestSincUnder(t *testing.T) {
	for _, c := range loadFIR(t).Sincs {
		taps, err := SincUnder(windowOf(t, c.Window, c.N), kindNamed(t, c.Kind), c.Scale, c.Rate, c.Edges...)
		noError(t, err)
		compareTaps(t, fmt.Sprintf("%s %s %d", c.Window, c.Kind, c.N), taps, c.Taps, 1e-13)
	}
	_, err := SincUnder(nil, Lowpass, false, 48000, 1000)
	wantError(t, err, "windowed lowpass", "0 taps is not a kernel")
}

func TestWindowErrors(t *testing.T) {
	_, err := Window("hanning", 5)
	wantError(t, err, `"hanning" is not known`, "hamming, hann, nuttall")
	_, err = Window("hann", 0)
	wantError(t, err, "0 points")
	for name, call := range map[string]func(){
		"gaussian, no points":   func() { GaussianWindow(0, 1) },
		"gaussian, no width":    func() { GaussianWindow(5, math.NaN()) },
		"chebyshev, no points":  func() { ChebyshevWindow(0, 60) },
		"chebyshev, too little": func() { ChebyshevWindow(9, 0) },
	} {
		func() {
			defer func() {
				if recover() == nil {
					t.Errorf("%s: no panic", name)
				}
			}()
			call()
		}()
	}
}
