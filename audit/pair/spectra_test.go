package pair

import (
	"encoding/json"
	"math"
	"math/rand/v2"
	"os"
	"testing"

	"gonum.org/v1/gonum/mat"
)

func within(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if diff := math.Abs(got - want); !(diff <= tol) {
		t.Errorf("%s: got %.8g, want %.8g, off by %.3g, allowed %.3g", what, got, want, diff, tol)
	}
}

// numbers is the generator of testdata/welch.py.
func numbers(seed uint32, count int) []float64 {
	x := make([]float64, count)
	for n := range x {
		seed = 1664525*seed + 1013904223
		x[n] = float64(seed)/(1<<31) - 1
	}
	return x
}

// Cross-spectra and coherence against scipy.signal.csd, welch and coherence (SciPy 1.10.1): periodic
// Hann window, segments of 512 that overlap by half. Rounding only, over 4096 samples.
func TestSpectraAgainstSciPy(t *testing.T) {
	text, err := os.ReadFile("testdata/welch.json")
	if err != nil {
		t.Fatal(err)
	}
	var want struct {
		Re        []float64 `json:"transfer_re"`
		Im        []float64 `json:"transfer_im"`
		Coherence []float64 `json:"coherence"`
	}
	if err := json.Unmarshal(text, &want); err != nil {
		t.Fatal(err)
	}
	x, noise := numbers(1, 4096), numbers(2, 4096)
	y := make([]float64, len(x))
	for n := range y {
		y[n] = 0.5*x[n] + 0.125*noise[n]
		if n >= 3 {
			y[n] -= 0.25 * x[n-3]
		}
	}
	s, w := newSpectra(512), newWelch(512)
	for at := 0; at+512 <= len(x); at += 256 {
		w.pair(s, x[at:at+512], y[at:at+512])
	}
	if len(want.Re) != len(s.xy) {
		t.Fatalf("%d bins, want %d", len(s.xy), len(want.Re))
	}
	for k, c := range s.xy {
		h := c / complex(s.xx[k], 0)
		within(t, "real part", real(h), want.Re[k], 1e-12)
		within(t, "imaginary part", imag(h), want.Im[k], 1e-12)
		within(t, "coherence", s.coherence(k, k+1), want.Coherence[k], 1e-12)
	}
}

// Conjugate gradients against a dense solution, and the product against the matrix.
func TestToeplitz(t *testing.T) {
	const n = 64
	r := rand.New(rand.NewPCG(2, 2))
	row, b := make([]float64, n), make([]float64, n)
	dense := mat.NewDense(n, n, nil)
	for m := range row {
		row[m] = math.Pow(0.9, float64(m)) * math.Cos(0.3*float64(m)) // the autocorrelation of a resonance
		b[m] = r.NormFloat64()
	}
	for i := range n {
		for j := range n {
			dense.Set(i, j, row[max(i-j, j-i)])
		}
		dense.Set(i, i, row[0]*(1+ridge))
	}
	matrix := newToeplitz(row)
	var product, solution mat.VecDense
	product.MulVec(dense, mat.NewVecDense(n, b))
	for i, v := range matrix.times(b) {
		within(t, "product", v, product.AtVec(i), 1e-12)
	}
	if err := solution.SolveVec(dense, mat.NewVecDense(n, b)); err != nil {
		t.Fatal(err)
	}
	for i, v := range matrix.solve(b, 1e-11) {
		within(t, "solution", v, solution.AtVec(i), 1e-8)
	}
}

// A response is explained to rounding in a few rounds though the input's spectrum is steep: a
// resonance 60 dB above the rest of it.
func TestResponseIsRefined(t *testing.T) {
	const size = 2048
	r := rand.New(rand.NewPCG(7, 7))
	x := make([]float64, 40*size)
	for n := range x {
		x[n] = r.NormFloat64()
		if n > 1 {
			x[n] += 2*0.999*math.Cos(0.4)*x[n-1] - 0.999*0.999*x[n-2]
		}
	}
	h := make([]float64, 2*size/reachOfSize)
	h[len(h)/2], h[len(h)/2+1], h[len(h)/2+40], h[len(h)/2-7] = 0.5, -0.3, 0.1, 0.05
	y := make([]float64, len(x))
	for n := range y {
		for i, v := range h {
			if m := n - i + len(h)/2; m >= 0 && m < len(x) {
				y[n] += v * x[m]
			}
		}
	}
	groups := make([]group, 6)
	each := func(visit func(g group, x, y []float64)) {
		for i := 0; (i+4)*size/2 <= len(x); i++ {
			at := i * size / 2
			visit(groups[i*len(groups)*size/2/len(x)], x[at:at+2*size], y[at+size/2:at+3*size/2])
		}
	}
	for i := range groups {
		groups[i] = group{part: i, spectra: newSpectra(size)}
	}
	w := newWelch(size)
	each(func(g group, x, y []float64) {
		w.segment(g.spectra, x, y)
	})
	c := newChannel(groups)
	c.explain(w, false)
	off := []float64{worstOff(c.h, h)}
	for round := range 3 {
		c.clear()
		response := w.transfer(c.h)
		each(func(g group, x, y []float64) { w.left(c.of(g.part), x, y, response) })
		c.explain(w, round == 2)
		off = append(off, worstOff(c.h, h))
	}
	t.Logf("off by %.2g, round by round", off)
	if !(off[3] < 1e-6 && off[1] < off[0]/10) {
		t.Errorf("off by %.2g, round by round; want less than 1e-6 in the end and a tenth at first", off)
	}
	if len(c.parts) != len(groups) {
		t.Errorf("%d parts, want %d", len(c.parts), len(groups))
	}
}

func worstOff(a, b []float64) float64 {
	var worst float64
	for i, v := range a {
		worst = max(worst, math.Abs(v-b[i]))
	}
	return worst
}
