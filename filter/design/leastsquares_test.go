package design

import (
	"fmt"
	"math"
	"testing"

	"fettle/filter/response"
)

// TestLeastSquaresReference compares taps with scipy.signal.firls (type I) and
// with a least-squares solution on quadrature points (types II to IV). The
// allowance is rounding times a condition of the equations of 1e5.
func TestLeastSquaresReference(t *testing.T) {
	worst := 0.0
	for _, c := range loadFIR(t).Squares {
		taps, err := LeastSquares(c.spec())
		noError(t, err)
		d := worstTap(t, taps, c.Taps)
		worst = math.Max(worst, d)
		if !(d <= 1e-11) {
			t.Errorf("%v, %d taps, %v, %s: off by %.3g, allowed 1e-11", c.spec().Type(), c.N, c.Bands, c.Source, d)
		}
		if kind := response.Symmetry(taps, 0); kind != c.spec().Type() {
			t.Errorf("symmetry %v, want %v", kind, c.spec().Type())
		}
	}
	t.Logf("taps within %.2g", worst)
}

// TestLeastSquaresLeast: no small change of a pair of taps makes the weighted
// squared deviation less, summed here on a fine grid and not integrated in
// closed form.
func TestLeastSquaresLeast(t *testing.T) {
	for _, c := range loadFIR(t).Squares {
		taps, err := LeastSquares(c.spec())
		noError(t, err)
		least := squaredDeviation(c.spec(), taps)
		for i := range len(taps) / 2 {
			for _, step := range []float64{1e-3, -1e-3} {
				moved := append([]float64(nil), taps...)
				moved[i] += step
				if got := squaredDeviation(c.spec(), mirrored(moved, c.Antisymmetric)); !(got > least) {
					t.Errorf("%d taps, %v: moving tap %d by %g gives %.12g, not above %.12g", c.N, c.Bands, i, step, got, least)
				}
			}
		}
	}
}

// squaredDeviation sums over bands on midpoints, 8 to a tap's width.
func squaredDeviation(s BandSpec, taps []float64) float64 {
	sum := 0.0
	for _, b := range s.Bands {
		points := 8 + int(16*float64(len(taps))*(b.To-b.From)/s.Rate)
		width := (b.To - b.From) / float64(points)
		for i := range points {
			hz := b.From + (float64(i)+0.5)*width
			d := amplitudeAt(taps, s.Antisymmetric, s.radians(hz)) - b.gainAt(hz)
			sum += b.Weight * d * d * width
		}
	}
	return sum
}

// TestLeastSquaresUndetermined: a wide transition leaves 401 taps undetermined
// in float64; the bands are met all the same.
func TestLeastSquaresUndetermined(t *testing.T) {
	s := BandSpec{Taps: 401, Rate: 48000, Bands: []Band{Flat(0, 4000, 1, 1), Flat(12000, 24000, 0, 1)}}
	taps, err := LeastSquares(s)
	noError(t, err)
	if got := highest(ripplesOf(s, taps)); !(got <= 1e-6) {
		t.Errorf("deviation %.3g, allowed 1e-6: the square root of the 1e-15 by which the taps' energy may count, and some", got)
	}
	s.Taps = 2049
	_, err = LeastSquares(s)
	wantError(t, err, "more than 2047 taps", "kaiser")
	_, err = LeastSquares(BandSpec{Taps: 1, Antisymmetric: true, Rate: 8, Bands: []Band{Flat(1, 3, 1, 1)}})
	wantError(t, err, "one tap cannot be antisymmetric")
}

func TestLeastOdd(t *testing.T) {
	for _, border := range []int{1, 3, 7, 100, 101, 999, 1001} {
		for _, start := range []int{-5, 1, 2, 50, 101, 5000} {
			tried := 0
			got := leastOdd(start, 1001, func(n int) bool {
				tried++
				if n%2 == 0 || n < 1 {
					t.Errorf("length %d tried", n)
				}
				return n >= border
			})
			if want := border | 1; got != want || tried > 25 {
				t.Errorf("from %d for %d: %d after %d tries", start, border, got, tried)
			}
		}
	}
	if got := leastOdd(11, 101, func(int) bool { return false }); !(got > 101) {
		t.Errorf("%d found where nothing meets", got)
	}
}

// TestGuards: only the wider transition is guarded.
func TestGuards(t *testing.T) {
	m := Mask{Kind: Bandpass, Pass: [2]float64{1000, 4000}, Stop: [2]float64{800, 8000}, RippleDB: 1, RejectDB: 60, Rate: 48000}
	guards := m.guards(0.25, true)
	if len(guards) != 1 || guards[0].From != 4050 || guards[0].To != 7950 || !(guards[0].GainFrom > 1) || guards[0].GainTo != 0 {
		t.Errorf("guards %+v", guards)
	}
	near(t, "weight times bound", guards[0].Weight*fromDB(1), 1, 1e-15)
	m.Stop[1] = 4200
	if guards := m.guards(0.25, true); len(guards) != 0 {
		t.Errorf("guards %+v of equal transitions", guards)
	}
	s := BandSpec{Taps: 63, Rate: m.Rate, Bands: ordered(append(m.bands(), guards...))}
	wantError(t, s.Validate(), "begins before") // the guard of the old, wider transition
	if got := fmt.Sprint(s.Bands[1]); got != "band 1000 to 4000 Hz" {
		t.Errorf("second band is %s", got)
	}
}
