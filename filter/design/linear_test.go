package design

import (
	"errors"
	"math"
	"math/cmplx"
	"testing"

	"fettle/filter/response"
)

// flatTarget passes everything, within 0.1 dB.
func flatTarget() Target {
	at := func(float64) Level { return Level{Aim: 1, Low: 1, High: 1, Allow: 0.1} }
	return Target{At: at, Grid: func(int) func(int) Level {
		return func(int) Level { return at(0) }
	}}
}

func TestLinearPhaseOfFlatTargetIsOneTap(t *testing.T) {
	taps, err := LinearPhase(flatTarget(), 1)
	if err != nil || len(taps) != 1 || !(math.Abs(taps[0]-1) <= 1e-12) {
		t.Errorf("%v, %v", taps, err)
	}
}

// What would need more than 2^22 taps is refused at once, with advice.
func TestLinearPhaseRefusesLength(t *testing.T) {
	_, err := LinearPhase(flatTarget(), 1e-7)
	var long *LengthError
	if !errors.As(err, &long) || long.Realisation != "linear" {
		t.Errorf("%v", err)
	}
}

// A raised-cosine target is met and the kernel is as short as it can be: its
// zero-phase response ends with the lag 4 exactly.
func TestLinearPhaseOfTrigonometricTarget(t *testing.T) {
	aim := func(omega float64) float64 { return 1 + 0.5*math.Cos(4*omega) }
	target := Target{Grid: func(size int) func(k int) Level {
		return func(k int) Level {
			a := aim(2 * math.Pi * float64(k) / float64(size))
			return Level{Aim: a, Low: a, High: a, Allow: 0.1}
		}
	}}
	taps, err := LinearPhase(target, 1)
	if err != nil || len(taps) != 9 || response.Symmetry(taps, 0) != response.TypeI {
		t.Fatalf("%v, %v", taps, err)
	}
	for omega := 0.0; omega < math.Pi; omega += 0.01 {
		if got := cmplx.Abs(response.TapsAt(taps, omega)); !(math.Abs(got-aim(omega)) <= 1e-12) {
			t.Errorf("%g at %g rad, want %g", got, omega, aim(omega))
		}
	}
}

// What is cut off a one-pole after n samples is a^n of its own response, so
// a^n may be 0.92 of 10^(0.1/20) - 1 and of the floor, 1e-4, where |H| is 1.
func TestCutTailOfOnePole(t *testing.T) {
	const a = 0.9
	s := []response.Section{{B0: 1 - a, A1: -a}}
	at := func(omega float64) Level {
		h := cmplx.Abs(response.SectionsAt(s, omega))
		return Level{Aim: h, Low: h, High: h, Allow: 0.1}
	}
	target := Target{At: at, Grid: func(size int) func(k int) Level {
		return func(k int) Level { return at(2 * math.Pi * float64(k) / float64(size)) }
	}}
	cut, ok := CutTail(response.Impulse(s, 1000), target, 2*(1-a))
	want := int(math.Ceil(math.Log(guard*(math.Pow(10, 0.1/20)-1+1e-4)) / math.Log(a)))
	if !ok || len(cut) != want {
		t.Errorf("cut to %d samples, want %d", len(cut), want)
	}
	if _, ok := CutTail(response.Impulse(s, 20), target, 2*(1-a)); ok {
		t.Error("a response that is too short is cut all the same")
	}
}
