package stream

import (
	"encoding/json"
	"math"
	"math/rand/v2"
	"os"
	"testing"

	"fettle/filter/response"
	"fettle/filter/stream/machine"
)

// roundingError is what rounding may do to a sample of a cascade's output, in the
// form of package abreast or in a direct form, transposed or not. With X and Y the
// peaks of a section's input and output, no product and no sum on the way exceeds
//
//	M = (|B0| + |B1| + |B2|) X + (1 + |A1| + |A2|) (Y + |B0| X),
//
// and there are no more than a dozen roundings a sample, those of coefficients
// included, each off by at most eps/2 M and, being as good as random, by a third of
// the square of that on average. They reach the output through 1/A and the sections
// after it, as noise of sqrt(12/3) eps/2 M |h|, h being that impulse response.
// Six times that is for the largest of many samples and sections.
func roundingError(sections []response.Section, x []float64) float64 {
	total, in := 0.0, peak(x)
	for i, s := range sections {
		out := peak(run(NewCascade(sections[:i+1], 1, machine.Best()), x))
		m := (math.Abs(s.B0)+math.Abs(s.B1)+math.Abs(s.B2))*in +
			(1+math.Abs(s.A1)+math.Abs(s.A2))*(out+math.Abs(s.B0)*in)
		after := NewCascade(append([]response.Section{{B0: 1, A1: s.A1, A2: s.A2}}, sections[i+1:]...), 1, machine.Best())
		total += 6 * 2 * eps / 2 * m * norm(run(after, impulse(0, after.Tail()+1)))
		in = out
	}
	return total
}

// randomSections are stable: poles of radius 0 to 0.9999, mostly near 1, a pair or
// two real ones, or none; zeros on the unit circle or anywhere.
func randomSections(r *rand.Rand, count int) []response.Section {
	sections := make([]response.Section, count)
	for i := range sections {
		s := &sections[i]
		radius, angle := 1-math.Pow(10, -4*r.Float64()), math.Pi*r.Float64()
		switch r.IntN(5) {
		case 0: // no poles
		case 1:
			other := 2*r.Float64() - 1
			s.A1, s.A2 = -radius-other, radius*other
		default:
			s.A1, s.A2 = -2*radius*math.Cos(angle), radius*radius
		}
		s.B0, s.B1, s.B2 = r.Float64(), r.NormFloat64(), r.NormFloat64()
		if r.IntN(2) == 0 {
			s.B1, s.B2 = -2*s.B0*math.Cos(angle*(0.5+r.Float64())), s.B0
		}
	}
	return sections
}

func TestCascadeRounding(t *testing.T) {
	r := rand.New(rand.NewPCG(40, 0))
	for range 25 {
		sections, x := randomSections(r, 1+r.IntN(9)), noise(r.Uint64(), 700)
		want, allowed := slowCascade(sections, x), roundingError(sections, x)
		onEachMachineKernel(t, func(t *testing.T, cascade newCascade) {
			got := run(cascade(sections, 1), x)
			compare(t, "output", got, want, allowed)
			t.Logf("%d sections: off by %.3g, allowed %.3g, peak %.3g", len(sections), worst(got, want), allowed, peak(want))
		})
	}
}

// transposed is direct form II transposed with a rounding at every operation, the
// usual form, and the yardstick for accuracy.
func transposed(sections []response.Section, x []float64) []float64 {
	y := append([]float64(nil), x...)
	for _, s := range sections {
		s1, s2 := 0.0, 0.0
		for n, v := range y {
			y[n] = float64(s.B0*v) + s1
			s1 = float64(s.B1*v) + s2 - float64(s.A1*y[n])
			s2 = float64(s.B2*v) - float64(s.A2*y[n])
		}
	}
	return y
}

// TestCascadeIsAsAccurateAsTransposed compares RMS errors by the geometric mean of
// their ratios over corners, qualities and signals: over all kinds of sections, and
// for each kind. Without fused operations there are more roundings than in the
// transposed form where B1 = 0, in a band-pass, which may show.
func TestCascadeIsAsAccurateAsTransposed(t *testing.T) {
	kinds := map[string]func(f, q float64) response.Section{
		"low-pass": lowpass, "high-pass": highpass, "notch": notch, "band-pass": bandpass, "all-pass": allpass,
	}
	cases := map[string][]accuracyCase{}
	for name, kind := range kinds {
		cases[name] = accuracyCases(kind)
	}
	for _, kernel := range machine.Available() {
		overall := 1.0
		for name := range kinds {
			ratio := errorRatio(kernel, cases[name])
			allowed := 1.0
			if kernel == machine.Portable && name == "band-pass" {
				allowed = 1.5
			}
			t.Logf("%v, %s: %.2f times the error of the transposed form", kernel, name, ratio)
			if !(ratio < allowed) {
				t.Errorf("%v, %s: %.2f times the error of the transposed form, allowed %g", kernel, name, ratio, allowed)
			}
			overall *= math.Pow(ratio, 1/float64(len(kinds)))
		}
		t.Logf("%v: %.2f times over all", kernel, overall)
		if !(overall < 0.7) {
			t.Errorf("%v: %.2f times the error of the transposed form over all, and the form is there for less", kernel, overall)
		}
	}
}

func errorRatio(kernel machine.Kernel, cases []accuracyCase) float64 {
	logs := 0.0
	for _, c := range cases {
		logs += math.Log(rmsError(run(NewCascade(c.sections, 1, kernel), c.x), c.exact) / c.transposedError)
	}
	return math.Exp(logs / float64(len(cases)))
}

type accuracyCase struct {
	sections        []response.Section
	x, exact        []float64
	transposedError float64
}

// accuracyCases are one and two sections of a kind, on noise and on a tone beside
// the corner.
func accuracyCases(kind func(f, q float64) response.Section) (cases []accuracyCase) {
	for i, f := range []float64{0.001, 0.01, 0.1, 0.3} {
		for _, q := range []float64{0.7, 20} {
			tone := make([]float64, 1500)
			for n := range tone {
				tone[n] = math.Sin(2 * math.Pi * 1.1 * f * float64(n))
			}
			for _, x := range [][]float64{noise(uint64(41+i), 1500), tone} {
				for _, sections := range [][]response.Section{{kind(f, q)}, {kind(f, q), kind(1.3*f, 0.7)}} {
					exact := slowCascade(sections, x)
					cases = append(cases, accuracyCase{sections, x, exact, rmsError(transposed(sections, x), exact)})
				}
			}
		}
	}
	return cases
}

func rmsError(got, want []float64) float64 {
	diff := make([]float64, len(want))
	for i := range diff {
		diff[i] = got[i] - want[i]
	}
	return norm(diff) / math.Sqrt(float64(len(diff)))
}

// TestCascadeAgainstSciPy: outputs of scipy.signal.sosfilt, see testdata/cascade.py;
// it rounds too.
func TestCascadeAgainstSciPy(t *testing.T) {
	data, err := os.ReadFile("testdata/cascade.json")
	if err != nil {
		t.Fatal(err)
	}
	var references []struct {
		Name     string
		Sections [][5]float64
		Y        []float64
	}
	if err := json.Unmarshal(data, &references); err != nil {
		t.Fatal(err)
	}
	if len(references) != 6 {
		t.Fatalf("%d references, want 6", len(references))
	}
	for _, reference := range references {
		var sections []response.Section
		for _, s := range reference.Sections {
			sections = append(sections, response.Section{B0: s[0], B1: s[1], B2: s[2], A1: s[3], A2: s[4]})
		}
		x := make([]float64, len(reference.Y))
		for n := range x {
			x[n] = float64((7*n*n+3*n)%101-50) / 64
		}
		allowed := 2 * roundingError(sections, x)
		onEachMachineKernel(t, func(t *testing.T, cascade newCascade) {
			got := run(cascade(sections, 1), x)
			compare(t, reference.Name, got, reference.Y, allowed)
			t.Logf("%s: off by %.3g, allowed %.3g", reference.Name, worst(got, reference.Y), allowed)
		})
	}
}

// FuzzCascade: any stable sections on any channels, against exact arithmetic, and
// any split of the calls, bit for bit.
func FuzzCascade(f *testing.F) {
	f.Add(uint64(1), uint8(4), uint8(2), uint16(600))
	f.Add(uint64(2), uint8(16), uint8(1), uint16(100))
	f.Add(uint64(3), uint8(1), uint8(6), uint16(1))
	f.Add(uint64(4), uint8(7), uint8(3), uint16(1025))
	f.Fuzz(func(t *testing.T, seed uint64, count, channels uint8, frames uint16) {
		r := rand.New(rand.NewPCG(seed, 0))
		sections := randomSections(r, int(count%20))
		x := noisePlanes(r.Uint64(), 1+int(channels%7), 1+int(frames%1500))
		onEachMachineKernel(t, func(t *testing.T, cascade newCascade) {
			k := cascade(sections, len(x))
			y := planes(len(x), len(x[0]))
			k.Process(y, x)
			one := int(seed % uint64(len(x)))
			compare(t, "output", y[one], slowCascade(sections, x[one]), roundingError(sections, x[one]))
			testSplits(t, k, x, y)
		})
	})
}
