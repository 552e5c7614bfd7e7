package filter

import (
	"flag"
	"fmt"
	"math"
	"math/cmplx"
	"strconv"
	"strings"
	"testing"

	"fettle/filter/response"

	"pgregory.net/rapid"
)

// drawStage makes one stage that rings for at most some tens of milliseconds.
func drawStage(t *rapid.T, i int) string {
	hz := func(lo, hi float64) string {
		return fmt.Sprintf("%.4f Hz", math.Exp(rapid.Float64Range(math.Log(lo), math.Log(hi)).Draw(t, fmt.Sprint("hz ", i))))
	}
	order := 2 * rapid.IntRange(1, 3).Draw(t, fmt.Sprint("half order ", i))
	gain := rapid.Float64Range(-12, 12).Draw(t, fmt.Sprint("gain ", i))
	q := rapid.Float64Range(0.4, 4).Draw(t, fmt.Sprint("q ", i))
	switch rapid.IntRange(0, 9).Draw(t, fmt.Sprint("kind ", i)) {
	case 0:
		return fmt.Sprintf("highpass: {at: %s, order: %d}", hz(100, 1000), order)
	case 1:
		return fmt.Sprintf("lowpass: {at: %s, order: %d}", hz(1000, 6000), order)
	case 2:
		return fmt.Sprintf("bandpass: {at: [%s, %s], order: %d}", hz(150, 500), hz(2000, 5000), order)
	case 3:
		return fmt.Sprintf("notch: {at: %s, q: %.3f}", hz(200, 2000), 2*q)
	case 4:
		return fmt.Sprintf("bell: {at: %s, gain: %.3f dB, q: %.3f}", hz(200, 6000), gain, q)
	case 5:
		return fmt.Sprintf("lowshelf: {at: %s, gain: %.3f dB}", hz(200, 2000), gain)
	case 6:
		return fmt.Sprintf("highshelf: {at: %s, gain: %.3f dB, matched: true}", hz(1000, 6000), gain)
	case 7:
		return fmt.Sprintf("lowpass: {at: %s, order: %d, family: chebyshev2, reject: 50 dB}", hz(1000, 5000), order)
	case 8:
		return fmt.Sprintf("highpass: {at: %s, order: %d, family: linkwitz-riley}", hz(150, 1000), order)
	}
	return fmt.Sprintf("hum: {mains: %s, harmonics: 3, width: 20 %%}", hz(80, 300))
}

// For any chain, every realisation but zero meets the target, measured here
// against the recursive curves on a grid of its own; its group delay is the sum
// of its stages', its response their product; and what zero says of its
// deviation is what it is.
func TestRandomChains(t *testing.T) {
	fewer(t, 15) // a chain takes half a second
	rapid.Check(t, func(rt *rapid.T) {
		var stages []string
		for i := range rapid.IntRange(1, 3).Draw(rt, "stages") {
			stages = append(stages, drawStage(rt, i))
		}
		text := "stages: [{" + strings.Join(stages, "}, {") + "}]"
		iir := realised(t, text, 16000, IIR).paths[0]
		sumOfStages(t, text, stages, iir)
		for _, as := range []Realisation{Linear, Minimum} {
			p := realised(t, text, 16000, as).paths[0]
			checkTarget(t, text+" "+string(as), iir, p, 1<<15)
		}
		f, err := parsed(t, text).Realise(16000, Zero)
		if err != nil {
			t.Fatalf("%s: %v", text, err)
		}
		if printed, measured := f.paths[0].TargetErrorDB(), deviation(f.paths[0], iir); !(printed >= measured-0.05) {
			t.Fatalf("%s as zero: prints %g dB, is %g dB off", text, printed, measured)
		}
	})
}

// sumOfStages checks that a cascade is the product of its stages and its group
// delay the sum of theirs.
func sumOfStages(t *testing.T, text string, stages []string, whole *Path) {
	t.Helper()
	var alone []*Path
	for _, s := range stages {
		alone = append(alone, realised(t, "stages: [{"+s+"}]", 16000, IIR).paths[0])
	}
	for _, omega := range []float64{0.05, 0.2, 0.7, 1.9, 3} {
		h, tau := complex(1, 0), 0.0
		for _, p := range alone {
			h *= p.System.At(omega)
			tau += response.SectionsGroupDelay(p.System.Sections, omega)
		}
		if d := cmplx.Abs(h - whole.System.At(omega)); !(d <= 1e-12*math.Max(1, cmplx.Abs(h))) {
			t.Fatalf("%s: the product differs by %g at %g rad", text, d, omega)
		}
		if d := math.Abs(tau - response.SectionsGroupDelay(whole.System.Sections, omega)); !(d <= 1e-9) {
			t.Fatalf("%s: the delays' sum differs by %g samples at %g rad", text, d, omega)
		}
	}
}

// deviation is the worst error in dB outside one-sided parts, errors 80 dB
// under the top forgiven, on a coarse grid of its own.
func deviation(p, iir *Path) float64 {
	const points = 3001
	top, worst := 0.0, 0.0
	for k := range points {
		top = math.Max(top, cmplx.Abs(iir.System.At(math.Pi*float64(k)/points)))
	}
	for k := range points {
		omega := math.Pi * float64(k) / points
		want := cmplx.Abs(iir.System.At(omega))
		if excess := math.Abs(cmplx.Abs(p.System.At(omega))-want) - 1e-4*top; excess > 0 && !insideCusp(iir.members, omega) {
			worst = math.Max(worst, 20*math.Log10(1+excess/want))
		}
	}
	return worst
}

// fewer makes rapid draw so many cases in one test, unless more or fewer were
// asked for on the command line.
func fewer(t *testing.T, cases int) {
	checks := flag.Lookup("rapid.checks")
	if checks.Value.String() != checks.DefValue {
		return
	}
	set := func(to string) {
		if err := checks.Value.Set(to); err != nil {
			t.Fatal(err)
		}
	}
	set(strconv.Itoa(cases))
	t.Cleanup(func() { set(checks.DefValue) })
}
