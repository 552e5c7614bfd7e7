package design

import (
	"fmt"

	"fettle/filter/response"
)

// LinearPhaseType returns the type of a kernel of so many taps, symmetric or
// antisymmetric: I and II, or III and IV, the odd length first. It is None for
// less than one tap.
func LinearPhaseType(taps int, antisymmetric bool) response.Kind {
	switch {
	case taps < 1:
		return response.None
	case taps%2 == 1 && !antisymmetric:
		return response.TypeI
	case !antisymmetric:
		return response.TypeII
	case taps%2 == 1:
		return response.TypeIII
	}
	return response.TypeIV
}

// ForcedZeros tells where every kernel of a type has a zero, whatever its taps:
// at 0 Hz (z = 1) and at half the rate (z = -1). Source: Oppenheim & Schafer,
// Discrete-Time Signal Processing, section on FIR systems with generalised
// linear phase.
func ForcedZeros(t response.Kind) (atDC, atHalfRate bool) {
	return t.Antisymmetric(), t == response.TypeII || t == response.TypeIII
}

// CheckForcedZeros reports why a kind of filter cannot be a kernel of so many
// taps: its type has a forced zero where the kind must pass. The error names
// what to ask for instead.
func CheckForcedZeros(kind Kind, taps int, antisymmetric bool) error {
	if err := checkKind(kind); err != nil {
		return err
	}
	atHalfRate := kind == Highpass || kind == Bandstop
	return checkForced(kind.String(), taps, antisymmetric, kind.passesDC(), atHalfRate)
}

// checkForced compares what must pass with the forced zeros; what names the
// wish.
func checkForced(what string, taps int, antisymmetric, passDC, passHalfRate bool) error {
	t := LinearPhaseType(taps, antisymmetric)
	zeroDC, zeroHalfRate := ForcedZeros(t)
	switch {
	case t == response.None:
		return fmt.Errorf("%d taps is not a kernel; ask for at least 1", taps)
	case passDC && zeroDC:
		return fmt.Errorf("a %s must pass 0 Hz, where an antisymmetric kernel has a forced zero (%v); use a symmetric one", what, t)
	case passHalfRate && zeroHalfRate && antisymmetric:
		return fmt.Errorf("a %s of odd length, antisymmetric, has forced zeros at 0 Hz and at half the sample rate (%v); use an even length, %d in place of %d, or a symmetric kernel", what, t, taps+1, taps)
	case passHalfRate && zeroHalfRate:
		return fmt.Errorf("a %s of even length has a forced zero at half the sample rate (%v); use an odd length, %d in place of %d", what, t, taps+1, taps)
	}
	return nil
}
