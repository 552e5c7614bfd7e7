package lanes

import (
	"math"
	"math/cmplx"
	"slices"
	"testing"
)

func TestUnitIsAccurate(t *testing.T) {
	const den = 4096
	for num := range den {
		w := unit(num, den)
		if diff := math.Abs(real(w)*real(w) + imag(w)*imag(w) - 1); !(diff <= 2*eps) {
			t.Errorf("unit(%d): squared modulus off by %g", num, diff)
		}
		half := unit((num+den/2)%den, den)
		if w+half != 0 {
			t.Errorf("unit(%d) = %v and half a turn on %v: not opposite", num, w, half)
		}
		if back := unit((den-num)%den, den); back != cmplx.Conj(w) {
			t.Errorf("unit(%d) = %v and back %v: not conjugate", num, w, back)
		}
		// Rect rounds the angle, up to 2 pi, to half of 8 eps/2.
		if diff := cmplx.Abs(w - cmplx.Rect(1, -2*math.Pi*float64(num)/den)); !(diff <= 4*eps) {
			t.Errorf("unit(%d): off by %g", num, diff)
		}
	}
}

// TestTwiddlesArePrefixes: a longer table starts as a shorter one, and asking
// for it leaves the shorter one alone.
func TestTwiddlesArePrefixes(t *testing.T) {
	short := makeTable(64)
	long := makeTable(4096)
	if !slices.Equal(short, long[:64]) {
		t.Error("the table of 64 is no prefix of that of 4096")
	}
	if !slices.Equal(table(64), short) {
		t.Error("the shared table differs from a fresh one")
	}
}

// TestTwiddles: block b has a quarter of the bit-reversed fraction of a turn.
func TestTwiddles(t *testing.T) {
	const count = 1024
	for b, w := range makeTable(count) {
		turn := reverse(b, count)
		for p, got := range []complex128{w.w1, w.w2, w.w3} {
			want := cmplx.Rect(1, -2*math.Pi*float64(turn*(p+1))/(4*count))
			// Rect rounds the angle, up to 3/4 of 2 pi, by half of 4 eps at most.
			if d := cmplx.Abs(got - want); !(d <= 4*eps) {
				t.Errorf("block %d, power %d: %v, want %v", b, p+1, got, want)
			}
		}
	}
}
