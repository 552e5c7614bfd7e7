package design

import (
	"math"
	"testing"

	"fettle/filter/response"
)

// TestForcedZeros reads the check vectors of the four types (Oppenheim &
// Schafer, section on generalised linear phase, from memory; recomputed by
// hand): where a zero is forced any kernel of the type has it, where none is,
// the vector has none.
func TestForcedZeros(t *testing.T) {
	for _, taps := range [][]float64{{1, 2, 3, 2, 1}, {1, 2, 2, 1}, {1, 2, 0, -2, -1}, {1, 2, -2, -1}} {
		kind := response.Symmetry(taps, 0)
		anti := kind.Antisymmetric()
		if got := LinearPhaseType(len(taps), anti); got != kind {
			t.Errorf("%v: %v, want %v", taps, got, kind)
		}
		dc, half := ForcedZeros(kind)
		for _, c := range []struct {
			zero  bool
			omega float64
		}{{dc, 0}, {half, math.Pi}} {
			gain := math.Abs(amplitudeAt(taps, anti, c.omega))
			if c.zero != (gain < 1e-12) {
				t.Errorf("%v: gain %g at %g, forced zero %v", kind, gain, c.omega, c.zero)
			}
		}
	}
	if LinearPhaseType(0, false) != response.None {
		t.Error("no taps have no type")
	}
}

// TestImpossibleTypes goes through kinds and types: the table of what a type
// cannot be, with what the error advises.
func TestImpossibleTypes(t *testing.T) {
	const fine = ""
	says := map[Kind][4]string{ // types I, II, III, IV
		Lowpass:  {fine, fine, "pass 0 Hz, where an antisymmetric kernel has a forced zero (type III); use a symmetric one", "(type IV)"},
		Highpass: {fine, "highpass of even length has a forced zero at half the sample rate (type II); use an odd length, 129 in place of 128", "use an even length, 130 in place of 129, or a symmetric kernel", fine},
		Bandpass: {fine, fine, fine, fine},
		Bandstop: {fine, "bandstop of even length", "(type III)", "(type IV)"},
	}
	for kind, row := range says {
		for i, want := range row {
			err := CheckForcedZeros(kind, 129-i%2, i >= 2)
			if want == fine {
				noError(t, err)
			} else {
				wantError(t, err, want)
			}
		}
	}
	wantError(t, CheckForcedZeros(Lowpass, 0, false), "0 taps is not a kernel")
	wantError(t, CheckForcedZeros(9, 3, false), "Kind(9)")
	_, _, err := ParksMcClellan(BandSpec{Taps: 128, Rate: 48000, Bands: []Band{Flat(0, 800, 0, 1), Flat(1000, 24000, 1, 1)}}, RemezOptions{})
	wantError(t, err, "of even length has a forced zero at half the sample rate (type II); use an odd length, 129 in place of 128")
	_, err = LeastSquares(BandSpec{Taps: 31, Antisymmetric: true, Rate: 48000, Bands: []Band{Flat(0, 800, 1, 1)}})
	wantError(t, err, "must pass 0 Hz", "type III")
}
