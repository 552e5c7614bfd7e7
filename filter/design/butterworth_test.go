package design

import (
	"fmt"
	"math"
	"math/cmplx"
	"testing"

	"fettle/filter/response"
)

// TestButterworthPrototype compares with the tabled poles of orders 1 to 10
// (testdata/butterworth-poles.csv, ten decimals).
func TestButterworthPrototype(t *testing.T) {
	for _, row := range readCSV(t, "butterworth-poles.csv") {
		order := int(number(t, row[0]))
		want := complex(number(t, row[2]), number(t, row[3]))
		poles := butterworthPrototype(order).poles
		if len(poles) != order {
			t.Errorf("order %d has %d poles", order, len(poles))
		}
		near(t, "distance to the nearest pole", cmplx.Abs(poles[nearest(poles, want)]-want), 0, 1e-10)
	}
}

// TestButterworthAgainstSciPy compares zeros, poles and gain with
// scipy.signal.butter(output="zpk"), orders 1 to 10, three rates with corners
// down to 20 Hz at 192 kHz. A root is compared relative to its distance from
// z = 1 or z = -1, whichever is nearer, because that distance is what a corner
// frequency is made of; zeros at those points must agree to 1e-10. The response
// is compared in absolute terms, the passband being 1.
func TestButterworthAgainstSciPy(t *testing.T) {
	worstRoot, worstResponse := 0.0, 0.0
	for _, c := range loadFixtures(t).Butterworth {
		name := fmt.Sprintf("%s order %d at %g Hz", c.Kind, c.Order, c.Rate)
		f, err := Butterworth(kindNamed(t, c.Kind), c.Order, c.Rate, c.Edges...)
		noError(t, err)
		worstRoot = math.Max(worstRoot, compareRoots(t, name+" poles", f.P, c.Poles, 1e-10))
		worstRoot = math.Max(worstRoot, compareRoots(t, name+" zeros", f.Z, c.Zeros, 1e-10))
		near(t, name+" gain", f.K/c.Gain, 1, 1e-10)
		for i, hz := range c.Hz {
			want := complex(c.Response[i][0], c.Response[i][1])
			off := cmplx.Abs(f.At(radians(hz, c.Rate)) - want)
			near(t, fmt.Sprintf("%s response at %g Hz", name, hz), off, 0, 1e-10)
			worstResponse = math.Max(worstResponse, off)
		}
	}
	t.Logf("worst difference: roots %.2g of their distance, response %.2g", worstRoot, worstResponse)
}

// compareRoots matches each wanted upper-half root with the nearest one that
// is left and returns the worst relative distance.
func compareRoots(t *testing.T, name string, got []complex128, want [][2]float64, tol float64) float64 {
	t.Helper()
	var upper []complex128
	for _, r := range got {
		if imag(r) >= 0 {
			upper = append(upper, r)
		}
	}
	if len(upper) != len(want) {
		t.Errorf("%s: %d in the upper half, want %d", name, len(upper), len(want))
		return math.Inf(1)
	}
	worst := 0.0
	for _, w := range want {
		root := complex(w[0], w[1])
		i := nearest(upper, root)
		distance := math.Min(cmplx.Abs(1-root), cmplx.Abs(1+root))
		if distance < 1e-10 {
			distance = 1
		}
		off := cmplx.Abs(upper[i]-root) / distance
		near(t, fmt.Sprintf("%s %v", name, root), off, 0, tol)
		worst = math.Max(worst, off)
		upper = append(upper[:i], upper[i+1:]...)
	}
	return worst
}

// butterworthMagnitude is the definition, in prewarped frequencies.
func butterworthMagnitude(kind Kind, order int, omega float64, edges []float64) float64 {
	w := math.Tan(omega / 2)
	x := w / edges[0]
	if kind.Edges() == 2 {
		x = (w - edges[0]*(edges[1]/w)) / (edges[1] - edges[0])
	}
	if kind == Highpass || kind == Bandstop {
		x = 1 / x
	}
	return 1 / math.Sqrt(1+math.Pow(math.Abs(x), float64(2*order)))
}

type place struct {
	rate  float64
	edges []float64
}

func placesOf(kind Kind) []place {
	var all []place
	for _, rate := range []float64{8000, 44100, 192000, 384000} {
		if kind.Edges() == 1 {
			all = append(all, place{rate, []float64{20}}, place{rate, []float64{rate / 5}})
		} else {
			all = append(all, place{rate, []float64{20, rate / 3}}, place{rate, []float64{rate / 50, rate / 40}})
		}
	}
	if kind.Edges() == 1 {
		all = append(all, place{192000, []float64{10}})
	}
	return all
}

// probeOmegas spreads points over eight octaves about each edge and ends.
func probeOmegas(p place) []float64 {
	omegas := []float64{math.Pi * 1e-6}
	for _, edge := range p.edges {
		for octave := -8.0; octave <= 8; octave += 0.25 {
			if omega := radians(edge, p.rate) * math.Exp2(octave); omega < math.Pi {
				omegas = append(omegas, omega)
			}
		}
	}
	return append(omegas, 3.14)
}

// TestButterworthSections compares the factored filter with the definition at
// orders 1 to 24, with corners down to 20 Hz at 384 kHz: 1e-9, or what float64
// coefficients allow if that is more. 1 + A1 + A2 is about the square of the
// corner in radians and a multiple of 2^-53, so it is off by up to 2^-54; a
// section of Q turns that into 2^-54 Q / corner^2 of |H|.
func TestButterworthSections(t *testing.T) {
	worst := 0.0
	for kind := Lowpass; kind <= Bandstop; kind++ {
		for _, p := range placesOf(kind) {
			for order := 1; order <= 24; order++ {
				f, err := Butterworth(kind, order, p.rate, p.edges...)
				noError(t, err)
				off := sectionsError(t, f, kind, order, p)
				worst = math.Max(worst, off)
				corner := radians(p.edges[0], p.rate)
				q := 1 / (2 * math.Sin(math.Pi/float64(2*order)))
				allowed := math.Max(1e-9, math.Ldexp(q, -54)/(corner*corner))
				near(t, fmt.Sprintf("%v order %d, %v", kind, order, p), off, 0, allowed)
			}
		}
	}
	t.Logf("worst |H| error %.2g of the passband", worst)
}

func sectionsError(t *testing.T, f ZPK, kind Kind, order int, p place) float64 {
	t.Helper()
	s := f.Sections()
	if !response.Stable(s) {
		t.Errorf("%v order %d %v: not stable", kind, order, p)
	}
	worst := 0.0
	for _, omega := range probeOmegas(p) {
		got := cmplx.Abs(response.SectionsAt(s, omega))
		off := math.Abs(got - butterworthMagnitude(kind, order, omega, prewarpAll(p.edges, p.rate)))
		if !(off <= worst) {
			worst = off
		}
	}
	return worst
}

// TestButterworthCorner: -3.0103 dB at each edge, half power by definition.
func TestButterworthCorner(t *testing.T) {
	for kind := Lowpass; kind <= Bandstop; kind++ {
		for _, p := range placesOf(kind) {
			for _, order := range []int{1, 2, 8} {
				f, err := Butterworth(kind, order, p.rate, p.edges...)
				noError(t, err)
				for _, hz := range p.edges {
					near(t, "corner", decibelsAt(f.Sections(), hz, p.rate), -10*math.Log10(2), 1e-7)
				}
			}
		}
	}
}

// TestNarrowBandpassDelay is a case in which group delay by polynomials fails:
// 985 to 1015 Hz at 96 kHz. At 1 kHz the delay must agree with the sum over
// poles and zeros of (1 - r cos d)/(1 - 2 r cos d + r^2), d the angle between.
func TestNarrowBandpassDelay(t *testing.T) {
	f, err := Butterworth(Bandpass, 4, 96000, 985, 1015)
	noError(t, err)
	omega := radians(1000, 96000)
	want := 0.0
	for i := range f.P {
		want += rootDelay(f.P[i], omega) - 0.5 // each zero lies at z = 1 or -1
	}
	got := response.SectionsGroupDelay(f.Sections(), omega)
	near(t, "relative delay", got/want, 1, 1e-8)
}

// rootDelay is Re{1/(1 - p e^(-j omega))}: what a pole adds to the delay, with
// a term for its power of z.
func rootDelay(p complex128, omega float64) float64 {
	return real(1 / (1 - p*cmplx.Exp(complex(0, -omega))))
}

func TestRecursiveErrors(t *testing.T) {
	cases := []struct {
		kind  Kind
		order int
		rate  float64
		edges []float64
		says  []string
	}{
		{Lowpass, 0, 48000, []float64{100}, []string{"order 0 is not between 1 and 32"}},
		{Lowpass, 33, 48000, []float64{100}, []string{"order 33"}},
		{Lowpass, 2, 16000, []float64{10000}, []string{"10000 Hz is not below half the sample rate (8000 Hz);"}},
		{Highpass, 2, 16000, []float64{8000}, []string{"8000 Hz is not below half the sample rate (8000 Hz);"}},
		{Lowpass, 2, 16000, []float64{0}, []string{"0 Hz is not above 0 Hz"}},
		{Lowpass, 2, 16000, []float64{math.NaN()}, []string{"NaN Hz is not above 0 Hz"}},
		{Lowpass, 2, 0, []float64{10}, []string{"a rate of 0 Hz"}},
		{Bandpass, 2, 16000, []float64{10}, []string{"bandpass has 2 edge frequencies, not 1"}},
		{Bandstop, 2, 16000, []float64{200, 100}, []string{"200 Hz is not below the upper edge 100 Hz"}},
		{Kind(9), 2, 16000, []float64{200}, []string{"Kind(9) is none of"}},
	}
	for _, c := range cases {
		_, err := Butterworth(c.kind, c.order, c.rate, c.edges...)
		wantError(t, err, c.says...)
		_, err = Elliptic(c.kind, c.order, c.rate, 0.1, 60, c.edges...)
		wantError(t, err, c.says...)
	}
}
