package lanes

import (
	"fmt"
	"slices"
	"testing"

	"fettle/filter/stream/internal/twiddle"
)

// passShapes are step, n, count: whole blocks, one and many; parts of rows; the
// least of each.
var passShapes = [][3]int{{1, 1, 1}, {4, 4, 1}, {4, 4, 5}, {16, 16, 3}, {16, 5, 1}, {7, 3, 2}, {64, 1, 1}}

// TestPassesEqualTheContract compares each pass with the plain Go function of
// its name. Inputs are at most 1 and outputs at most 4 sqrt(2), of some five
// roundings each, which fusing may spare: 8 eps.
func TestPassesEqualTheContract(t *testing.T) {
	passes := []struct {
		name  string
		radix int
		run   func(e engine, x []float64, step, n, count int, w []twiddle.Factor)
		twin  func(x []float64, lanes, step, n, count int, w []twiddle.Factor)
	}{
		{"split2", 2, engine.split2, split2Generic},
		{"join2", 2, engine.join2, join2Generic},
		{"split4", 4, engine.split4, split4Generic},
		{"join4", 4, engine.join4, join4Generic},
	}
	factors := twiddle.Make(64)
	atEachEngine(t, func(t *testing.T, e engine) {
		for _, p := range passes {
			for _, s := range passShapes {
				step, n, count := s[0], s[1], s[2]
				x := noise(1, 2*e.lanes*p.radix*step*count)
				want := slices.Clone(x)
				p.twin(want, e.lanes, step, n, count, factors[9:])
				all, inside := guarded(0.25, x)
				p.run(e, inside, step, n, count, factors[9:])
				allWant, _ := guarded(0.25, want)
				what := fmt.Sprintf("%s of %v", p.name, s)
				compare(t, what, all, allWant, 8*eps)
				for i := range inside {
					if row := i / (2 * e.lanes) % step; row >= n && inside[i] != x[i] {
						t.Fatalf("%s: value %d beyond the n elements of a row was changed", what, i)
					}
				}
			}
		}
	})
}

// TestProductEqualsTheContract: with a spectrum of points of at most sqrt(2),
// outputs are at most 16 sqrt(2) of some ten roundings each: 32 eps.
func TestProductEqualsTheContract(t *testing.T) {
	factors := twiddle.Make(64)
	atEachEngine(t, func(t *testing.T, e engine) {
		for _, count := range []int{1, 2, 7} {
			spectrum := make([]complex128, 4*count)
			for i, v := range noise(2, len(spectrum)) {
				spectrum[i] = complex(v, 1-v)
			}
			x := noise(3, 8*e.lanes*count)
			want := slices.Clone(x)
			productGeneric(want, e.lanes, count, spectrum, factors[5:])
			e.product(x, count, spectrum, factors[5:])
			compare(t, fmt.Sprintf("%d blocks", count), x, want, 32*eps)
		}
	})
}

// TestJoinsUndoSplits, but for the factor of the radix, within the same bound.
func TestJoinsUndoSplits(t *testing.T) {
	factors := twiddle.Make(64)
	atEachEngine(t, func(t *testing.T, e engine) {
		x := noise(4, 2*e.lanes*64)
		y := slices.Clone(x)
		e.split4(y, 4, 4, 4, factors[4:])
		e.split2(y, 2, 2, 16, factors[16:])
		e.join2(y, 2, 2, 16, factors[16:])
		e.join4(y, 4, 4, 4, factors[4:])
		for i := range y {
			y[i] /= 8
		}
		compare(t, "there and back", y, x, 8*eps)
	})
}

// TestGenericPassesByHand: a four-point block with factors 1 is the four-point
// transform, in bit-reversed order, exact on integers.
func TestGenericPassesByHand(t *testing.T) {
	one := []twiddle.Factor{{W1: 1, W2: 1, W3: 1}}
	x := []float64{1, 0, 2, 0, 3, 0, 5, 1} // one lane: 1, 2, 3, 5+j
	split4Generic(x, 1, 1, 1, 1, one)
	// X[0] = 11+j, X[2] = 1-2-(5+j)+3 = -3-j, X[1] = 1-3-2j+j(5+j) = -3+3j, X[3] = -1-3j
	sameBits(t, "split4", x, []float64{11, 1, -3, -1, -3, 3, -1, -3})
	y := []float64{1, 2, 3, 5}
	split2Generic(y, 1, 1, 1, 1, one)
	sameBits(t, "split2", y, []float64{4, 7, -2, -3})
}

// TestTwiddles: block b has a quarter of the bit-reversed fraction of a turn.
func TestTwiddles(t *testing.T) {
	const count = 1024
	for b, w := range twiddle.Make(count) {
		turn := reverse(b, count)
		for p, got := range []complex128{w.W1, w.W2, w.W3} {
			want := rect(turn*(p+1), 4*count)
			// Rect rounds the angle, up to 3/4 of 2 pi, by half of 4 eps at most.
			if d := got - want; !(real(d)*real(d)+imag(d)*imag(d) <= 16*eps*eps) {
				t.Errorf("block %d, power %d: %v, want %v", b, p+1, got, want)
			}
		}
	}
}
