package pcm

import (
	"crypto/sha256"
	"encoding/binary"
	"math"
	"slices"
	"testing"

	"gonum.org/v1/gonum/dsp/fourier"
	"pgregory.net/rapid"
)

// TestGenerator compares with the first outputs of the authors' C program for
// the state 1, 2, 3, 4, as the tests of other implementations list them
// (figures from memory).
func TestGenerator(t *testing.T) {
	g := generator{1, 2, 3, 4}
	for i, want := range []uint64{41943041, 58720359, 3588806011781223, 3591011842654386, 9228616714210784205,
		9973669472204895162, 14011001112246962877, 12406186145184390807, 15849039046786891736, 10450023813501588000} {
		if got := g.next(); got != want {
			t.Errorf("output %d: %d, want %d", i, got, want)
		}
	}
}

// TestSeeds: number i is of generator i mod 8, whose seed is the hash that the doc
// comment describes.
func TestSeeds(t *testing.T) {
	chain := sha256.Sum256([]byte("chain"))
	head := append([]byte("fettle dither 2\x00"), chain[:]...)
	stream := sha256.Sum256(append(append(head, 3, 0, 0, 0, 0, 0, 0, 0), "deep/a.wav"...))
	var lanes [8]generator
	for j := range lanes {
		seed := sha256.Sum256(append(stream[:], byte(j)))
		le := binary.LittleEndian
		lanes[j] = generator{le.Uint64(seed[:]), le.Uint64(seed[8:]), le.Uint64(seed[16:]), le.Uint64(seed[24:])}
	}
	got := make([]float64, 1003)
	NewDither(chain, "deep/a.wav", 3).Fill(got)
	for i, v := range got {
		u := lanes[i%8].next()
		// The halves of u as fractions of 2^32; both are exact.
		if want := float64(u>>32)/(1<<32) - float64(u&(1<<32-1))/(1<<32); v != want {
			t.Fatalf("number %d: %v, want %v", i, v, want)
		}
	}
}

// TestFillSplit: any split gives the same numbers.
func TestFillSplit(t *testing.T) {
	want := make([]float64, 2000)
	NewDither([32]byte{3}, "s.wav", 0).Fill(want)
	rapid.Check(t, func(t *rapid.T) {
		d := NewDither([32]byte{3}, "s.wav", 0)
		got := make([]float64, len(want))
		for rest := got; len(rest) > 0; {
			n := min(len(rest), rapid.IntRange(0, 3*ditherLanes*rapid.IntRange(1, 9).Draw(t, "scale")).Draw(t, "n"))
			d.Fill(rest[:n])
			rest = rest[n:]
		}
		if !slices.Equal(got, want) {
			t.Fatal("other numbers")
		}
	})
}

const drawn = 1 << 18

func draw(d *Dither) []float64 {
	x := make([]float64, drawn)
	d.Fill(x)
	return x
}

func mean(x []float64) float64 {
	sum := 0.
	for _, v := range x {
		sum += v
	}
	return sum / float64(len(x))
}

// product is the mean of x[i+lag]*y[i].
func product(x, y []float64, lag int) float64 {
	sum := 0.
	for i := range len(x) - lag {
		sum += x[i+lag] * y[i]
	}
	return sum / float64(len(x)-lag)
}

// Five standard errors: a fixed seed either passes or not, and a right generator
// passes with a probability of 0.9999994. The variance of a triangular number
// in (-1, 1) is 1/6, that of its square 1/15 - 1/36.
var (
	meanTolerance     = 5 * math.Sqrt(1./6/drawn)
	varianceTolerance = 5 * math.Sqrt((1./15-1./36)/drawn)
	productTolerance  = 5 * (1. / 6) / math.Sqrt(drawn)
)

func TestDitherIsTriangular(t *testing.T) {
	x := draw(NewDither([32]byte{1, 2, 3}, "talk/one.wav", 0))
	if m := mean(x); !(math.Abs(m) <= meanTolerance) {
		t.Errorf("mean %g, allowed %g", m, meanTolerance)
	}
	if v := product(x, x, 0); !(math.Abs(v-1./6) <= varianceTolerance) {
		t.Errorf("variance %g, want 1/6, allowed %g", v, varianceTolerance)
	}
	for lag := 1; lag <= 3*ditherLanes; lag++ {
		if r := product(x, x, lag); !(math.Abs(r) <= productTolerance) {
			t.Errorf("correlation at lag %d: %g, allowed %g", lag, r, productTolerance)
		}
	}
	checkHistogram(t, x)
}

// checkHistogram compares 20 bins with the triangle's areas by chi square: with
// 19 degrees of freedom 60 is exceeded once in a quarter of a million.
func checkHistogram(t *testing.T, x []float64) {
	t.Helper()
	const bins, limit = 20, 60
	var count [bins]float64
	for _, v := range x {
		if !(math.Abs(v) < 1) {
			t.Fatalf("%g is outside (-1, 1)", v)
		}
		count[int((v+1)*bins/2)]++
	}
	chi := 0.
	for i, n := range count {
		centre := (float64(i)+0.5)*2/bins - 1
		want := (1 - math.Abs(centre)) * 2 / bins * float64(len(x))
		chi += (n - want) * (n - want) / want
	}
	if !(chi <= limit) {
		t.Errorf("chi square %g for %d bins, allowed %d", chi, bins, limit)
	}
}

// TestDitherIsWhite: in each of 32 bands of 4096 bins, the mean of the periodogram
// is the variance. A bin of it is the variance times an exponential number of mean
// and standard deviation 1, nearly independent of the others, so five standard
// errors of a band are 5/√4096 = 8 %. That the numbers are not Gaussian makes the
// sum over all bins vary less, not more: their excess kurtosis is -0.6.
func TestDitherIsWhite(t *testing.T) {
	const bands, bins = 32, drawn / 2 / 32
	tolerance := 5 / math.Sqrt(bins)
	spectrum := fourier.NewFFT(drawn).Coefficients(nil, draw(NewDither([32]byte{1, 2, 3}, "talk/one.wav", 1)))
	worst := 0.
	for b := range bands {
		power := 0.
		for _, c := range spectrum[1+b*bins : 1+(b+1)*bins] {
			power += (real(c)*real(c) + imag(c)*imag(c)) / drawn
		}
		off := power/bins/(1./6) - 1
		if worst = max(worst, math.Abs(off)); !(math.Abs(off) <= tolerance) {
			t.Errorf("band %d: off by %.1f %%, allowed %.1f", b, 100*off, 100*tolerance)
		}
	}
	t.Logf("flat within %.1f %%, allowed %.1f", 100*worst, 100*tolerance)
}

func TestDitherStreams(t *testing.T) {
	base := draw(NewDither([32]byte{9}, "a.wav", 0))
	for name, d := range map[string]*Dither{
		"channel": NewDither([32]byte{9}, "a.wav", 1),
		"path":    NewDither([32]byte{9}, "b.wav", 0),
		"chain":   NewDither([32]byte{8}, "a.wav", 0),
	} {
		other := draw(d)
		for lag := range 2 * ditherLanes {
			for _, r := range []float64{product(base, other, lag), product(other, base, lag)} {
				if !(math.Abs(r) <= productTolerance) {
					t.Errorf("another %s: correlation %g at lag %d, allowed %g", name, r, lag, productTolerance)
				}
			}
		}
	}
	for i, v := range draw(NewDither([32]byte{9}, "a.wav", 0)) {
		if v != base[i] {
			t.Fatalf("number %d is not reproduced", i)
		}
	}
}

// TestDitheredError: with dither the total error has mean 0 and power LSB²/4
// whatever the signal (Lipshitz, Wannamaker and Vanderkooy 1992). Its fourth
// moment is below 1/4: five standard errors of the power are within 5/2/√n.
func TestDitheredError(t *testing.T) {
	const lsb = 1. / 32768
	for name, signal := range map[string]func(i int) float64{
		"silence":    func(int) float64 { return 0 },
		"0.3 LSB":    func(int) float64 { return 0.3 * lsb },
		"half LSB":   func(int) float64 { return 0.5 * lsb },
		"small":      func(i int) float64 { return 0.8 * lsb * math.Sin(float64(i)*0.1) },
		"loud":       func(i int) float64 { return 0.9 * math.Sin(float64(i)*0.1234) },
		"at the end": func(int) float64 { return -32766.7 * lsb }, // dither just fits
	} {
		x := make([]float64, drawn)
		for i := range x {
			x[i] = signal(i)
		}
		failure := ditheredError(t, x, lsb)
		tolerance := 2.5 / math.Sqrt(drawn)
		if m := mean(failure); !(math.Abs(m) <= tolerance) {
			t.Errorf("%s: mean error %g LSB, allowed %g", name, m, tolerance)
		}
		if p := product(failure, failure, 0); !(math.Abs(p-0.25) <= tolerance) {
			t.Errorf("%s: error power %g LSB², want 1/4, allowed %g", name, p, tolerance)
		}
	}
}

// ditheredError is the error in LSB of 16 bits with dither.
func ditheredError(t *testing.T, x []float64, lsb float64) []float64 {
	t.Helper()
	e := Encoding{Bytes: 2, Bits: 16}
	out := make([]byte, 2*len(x))
	if err := mustQuantiser(t, e, 1, []*Dither{NewDither([32]byte{4}, "e.wav", 0)}).Encode(out, x); err != nil {
		t.Fatal(err)
	}
	y := decode(e, out)
	for i := range y {
		y[i] = (y[i] - x[i]) / lsb
	}
	return y
}
