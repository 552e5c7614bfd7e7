package design

import (
	"math"
	"math/cmplx"
	"strconv"
	"testing"

	"fettle/filter/response"
)

// fromZeros expands g (1 - real/z)(1 - 2 rho cos(1)/z + rho^2/z^2).
func fromZeros(g, zero, rho float64) []float64 {
	b, c := -2*rho*math.Cos(1), rho*rho
	return []float64{g, g * (b - zero), g * (c - zero*b), -g * zero * c}
}

// TestSmithExample converts all versions of a kernel with zeros 0.5 and
// 0.8 e^(+-j) to the same minimum-phase taps, to 1e-10 (Smith; Oppenheim &
// Schafer; rounded taps [1, -1.3645, 1.0722, -0.32] in the handbooks).
func TestSmithExample(t *testing.T) {
	want := fromZeros(1, 0.5, 0.8)
	compareTaps(t, "the handbook's", want, []float64{1, -1.3645, 1.0722, -0.32}, 5e-5)
	mixed := fromZeros(0.5, 2, 0.8)
	compareTaps(t, "mixed", mixed, []float64{0.5, -1.4322, 1.1845, -0.64}, 5e-5)
	maximum := []float64{want[3], want[2], want[1], want[0]}
	for name, taps := range map[string][]float64{"minimum": want, "mixed": mixed, "maximum": maximum, "negated": {-0.5, 1.43224184, -1.18448369, 0.64}} {
		tol := 1e-10
		if name == "negated" {
			tol = 1e-7 // the digits above
		}
		got, worst, err := MinimumPhase(taps, 0.1)
		noError(t, err)
		compareTaps(t, name, got, want, tol)
		near(t, "error in dB", worst, 0, 1e-9)
	}
	checkEnergy(t, want, []float64{1, 2.862, 4.012, 4.114})
	checkEnergy(t, mixed, []float64{0.250, 2.301, 3.704, 4.114})
	checkDelays(t, want, []float64{-0.464, -3.606, 1.188})
}

// checkEnergy compares the running sum of squares with three decimals.
func checkEnergy(t *testing.T, taps, want []float64) {
	t.Helper()
	sum := 0.0
	for i, h := range taps {
		sum += h * h
		near(t, "cumulative energy", sum, want[i], 6e-4)
	}
}

// checkDelays compares group delay at 0, 1 and 3 radians with three decimals.
func checkDelays(t *testing.T, taps, want []float64) {
	t.Helper()
	s := []response.Section{{B0: 1, B1: -0.5}, {B0: 1, B1: -1.6 * math.Cos(1), B2: 0.64}}
	for i, omega := range []float64{0, 1, 3} {
		near(t, "response", cmplx.Abs(response.SectionsAt(s, omega)-response.TapsAt(taps, omega)), 0, 1e-14)
		near(t, "group delay", response.SectionsGroupDelay(s, omega), want[i], 6e-4)
	}
}

// TestDoubleZeroOnCircle: [-1 2 -1] is zero at 0 Hz, where log|H| does not
// exist; its minimum-phase version is [1 -2 1].
func TestDoubleZeroOnCircle(t *testing.T) {
	got, worst, err := MinimumPhase([]float64{-1, 2, -1}, 0.1)
	noError(t, err)
	// 0.1 dB is 0.0116 of a tap of 2.
	compareTaps(t, "taps", got, []float64{1, -2, 1}, 0.024)
	if !(worst <= 0.1) {
		t.Errorf("worst %g dB, allowed 0.1 dB", worst)
	}
}

// TestLongLowpass: 1023 taps with 86 dB. The result keeps passband and
// stopband, and is not the square root of the magnitude (which would halve the
// decibels). Passband within 0.005 dB: a grid of the length itself is 0.11 dB
// off.
func TestLongLowpass(t *testing.T) {
	taps, err := WindowedSinc(Lowpass, 1023, KaiserBeta(86), true, 48000, 8000)
	noError(t, err)
	got, worst, err := MinimumPhase(taps, 0.1)
	noError(t, err)
	if len(got) != len(taps) {
		t.Fatalf("%d taps, want %d", len(got), len(taps))
	}
	pass, stop, stopBefore := 0.0, 0.0, 0.0
	const k = 1 << 16
	before, after := response.Spectrum(taps, k), response.Spectrum(got, k)
	for i := range before {
		switch hz := 48000 * float64(i) / k; {
		case hz <= 7870:
			pass = math.Max(pass, math.Abs(toDB(cmplx.Abs(after[i])/cmplx.Abs(before[i]))))
		case hz >= 8130:
			stop = math.Max(stop, cmplx.Abs(after[i]))
			stopBefore = math.Max(stopBefore, cmplx.Abs(before[i]))
		}
	}
	t.Logf("passband within %.2g dB, stopband %.2f dB before, %.2f dB after, worst %.2g dB", pass, toDB(stopBefore), toDB(stop), worst)
	near(t, "passband", pass, 0, 0.005)
	near(t, "stopband", toDB(stop), toDB(stopBefore), 0.5)
	checkEarliest(t, taps, got)
}

// checkEarliest: of all kernels of one magnitude the minimum-phase one has the
// most energy up to every sample (Oppenheim & Schafer).
func checkEarliest(t *testing.T, taps, minimum []float64) {
	t.Helper()
	sum, least := 0.0, 0.0
	for i := range taps {
		sum += taps[i] * taps[i]
		least += minimum[i] * minimum[i]
		if !(least >= sum*(1-1e-4)) {
			t.Errorf("up to sample %d: energy %g, the linear-phase kernel has %g", i, least, sum)
			return
		}
	}
}

// TestConvertedMasks: a whole set of Kaiser kernels keeps the stated bound at
// frequencies between those that the conversion itself measured.
func TestConvertedMasks(t *testing.T) {
	for _, m := range masks() {
		taps, err := Kaiser(m)
		noError(t, err)
		const tol = 0.05
		got, worst, err := MinimumPhase(taps, tol)
		noError(t, err)
		t.Logf("%v: %d taps, worst %.3g dB", m.Kind, len(taps), worst)
		top := fromDB(m.RippleDB)
		for i := range 5003 {
			omega := math.Pi * float64(i) / 5002
			wanted := cmplx.Abs(response.TapsAt(taps, omega))
			off := math.Abs(cmplx.Abs(response.TapsAt(got, omega)) - wanted)
			if allowed := (fromDB(tol)-1)*wanted + 1e-4*top; !(off <= allowed) {
				t.Errorf("%v at %g: off by %g, allowed %g", m.Kind, omega, off, allowed)
				break
			}
		}
	}
}

func TestMinimumPhaseErrors(t *testing.T) {
	try := func(taps []float64, tol float64) error {
		_, _, err := MinimumPhase(taps, tol)
		return err
	}
	wantError(t, try(nil, 0.1), "kernel of 0 zeros")
	wantError(t, try([]float64{0, 0}, 0.1), "no magnitude")
	wantError(t, try([]float64{1, math.NaN()}, 0.1), "tap 1 is NaN")
	wantError(t, try([]float64{1}, 0), "tolerance of 0 dB")
	wantError(t, try(make([]float64, 1<<20+1), 0.1), "shorten the kernel")
}

func BenchmarkMinimumPhase(b *testing.B) {
	for _, n := range []int{4095, 16383} {
		taps, err := WindowedSinc(Lowpass, n, KaiserBeta(100), true, 48000, 12000)
		if err != nil {
			b.Fatal(err)
		}
		b.Run(strconv.Itoa(n), func(b *testing.B) {
			for b.Loop() {
				if _, _, err := MinimumPhase(taps, 0.1); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
