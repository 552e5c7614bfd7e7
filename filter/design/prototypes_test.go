package design

import (
	"fmt"
	"math"
	"math/cmplx"
	"strconv"
	"testing"
)

// TestPrintedPoles compares the analogue prototypes with tables of poles (ten
// decimals, orders 1 to 10) and, for Bessel, of each pair's Q. testdata/README.md
// names their sources.
func TestPrintedPoles(t *testing.T) {
	for _, table := range []struct {
		name      string
		prototype func(order int) analogue
	}{
		{"bessel-poles-unit-delay.csv", unitDelayBessel},
		{"bessel-poles-3db.csv", halfPowerBessel},
	} {
		for _, row := range readCSV(t, table.name) {
			checkPole(t, table.name, table.prototype(int(number(t, row[0]))), row[2:])
		}
	}
	for _, row := range readCSV(t, "chebyshev1-poles.csv") {
		order := int(number(t, row[1]))
		checkPole(t, fmt.Sprintf("chebyshev1 order %d", order), chebyshev1Prototype(order, number(t, row[0])), row[3:])
	}
}

// checkPole looks for a row's pole (real, imaginary, modulus, Q if complex).
func checkPole(t *testing.T, name string, a analogue, row []string) {
	t.Helper()
	want := complex(number(t, row[0]), number(t, row[1]))
	p := a.poles[nearest(a.poles, want)]
	near(t, name+" pole", cmplx.Abs(p-want), 0, 1e-10)
	near(t, name+" modulus", cmplx.Abs(p), number(t, row[2]), 1e-10)
	if row[3] != "" {
		near(t, name+" Q", -cmplx.Abs(p)/(2*real(p)), number(t, row[3]), 1e-9)
	}
}

// expanded returns the polynomial with the roots, highest power first. Its use
// is in tests, to compare with printed polynomials.
func expanded(roots []complex128) []float64 {
	c := []complex128{1}
	for _, r := range roots {
		c = append(c, 0)
		for i := len(c) - 1; i > 0; i-- {
			c[i] -= r * c[i-1]
		}
	}
	out := make([]float64, len(c))
	for i, v := range c {
		out[i] = real(v)
	}
	return out
}

// TestPrintedPolynomials compares with the normalised low-pass polynomials of
// the handbooks: Butterworth (six decimals, order 8 to its middle), Bessel (the
// reverse Bessel polynomials, whole numbers), Chebyshev of 1 dB and third, 3 dB
// and second order (five decimals). Recomputed with SciPy 1.10 (buttap, cheb1ap,
// bessel) before they were written down here; a 3 dB table means exactly 3 dB.
func TestPrintedPolynomials(t *testing.T) {
	for _, c := range []struct {
		a    analogue
		want []float64
		tol  float64
	}{
		{butterworthPrototype(2), []float64{1, 1.414214, 1}, 1e-6},
		{butterworthPrototype(3), []float64{1, 2, 2, 1}, 1e-6},
		{butterworthPrototype(4), []float64{1, 2.613126, 3.414214, 2.613126, 1}, 1e-6},
		{butterworthPrototype(5), []float64{1, 3.236068, 5.236068, 5.236068, 3.236068, 1}, 1e-6},
		{butterworthPrototype(6), []float64{1, 3.863703, 7.464102, 9.141620, 7.464102, 3.863703, 1}, 1e-6},
		{butterworthPrototype(8), []float64{1, 5.125831, 13.137071, 21.846151, 25.688356}, 1e-6},
		{chebyshev1Prototype(3, 1), []float64{1, 0.98834, 1.23841, 0.49131}, 5.1e-6},
		{chebyshev1Prototype(2, 3), []float64{1, 0.64490, 0.70795}, 5.1e-6},
		{unitDelayBessel(1), []float64{1, 1}, 1e-14},
		{unitDelayBessel(2), []float64{1, 3, 3}, 1e-14},
		{unitDelayBessel(3), []float64{1, 6, 15, 15}, 1e-13},
		{unitDelayBessel(4), []float64{1, 10, 45, 105, 105}, 1e-12},
		{unitDelayBessel(5), []float64{1, 15, 105, 420, 945, 945}, 1e-11},
		{unitDelayBessel(6), []float64{1, 21, 210, 1260, 4725, 10395, 10395}, 1e-10},
		{unitDelayBessel(8), []float64{1, 36, 630, 6930, 51975, 270270, 945945, 2027025, 2027025}, 1e-8},
	} {
		got := expanded(c.a.poles)
		for i, want := range c.want {
			near(t, fmt.Sprintf("order %d, s^%d", len(c.a.poles), len(c.a.poles)-i), got[i], want, c.tol)
		}
	}
}

// delay returns the prototype's group delay in seconds at w rad/s.
func (a analogue) delay(w float64) float64 {
	sum := 0.0
	for _, p := range a.poles {
		sum += real(1 / (complex(0, w) - p))
	}
	return sum
}

// TestPrintedBessel compares with printed half-power frequencies and with those
// at which the delay has fallen by 1 % and 10 % (recomputed with SciPy 1.10,
// four and three decimals).
func TestPrintedBessel(t *testing.T) {
	for _, row := range [][4]float64{
		{1, 1.0000, 0.101, 0.333}, {2, 1.3617, 0.563, 1.086}, {3, 1.7557, 1.205, 1.940}, {4, 2.1139, 1.933, 2.836},
		{5, 2.4274, 2.712, 3.756}, {6, 2.7034, 3.525, 4.691}, {8, 3.1796, 5.216, 6.592},
	} {
		order := int(row[0])
		a := unitDelayBessel(order)
		half := cmplx.Abs(a.poles[0]) / cmplx.Abs(halfPowerBessel(order).poles[0])
		near(t, "order "+strconv.Itoa(order)+" half power", half, row[1], 5.1e-5)
		near(t, "delay at 0", a.delay(0), 1, 1e-13)
		near(t, "1 % less", crossingOf(func(w float64) float64 { return 0.99 - a.delay(w) }, 0, 10), row[2], 5.1e-4)
		near(t, "10 % less", crossingOf(func(w float64) float64 { return 0.9 - a.delay(w) }, 0, 10), row[3], 5.1e-4)
	}
}

// crossingOf returns where a function that rises through 0 does so.
func crossingOf(f func(float64) float64, lo, hi float64) float64 {
	for range 60 {
		if middle := (lo + hi) / 2; f(middle) < 0 {
			lo = middle
		} else {
			hi = middle
		}
	}
	return lo
}

// TestBesselRoots checks all orders: the sum of the roots is -n(n+1)/2 and their
// product (2n-1)!!, the coefficients at both ends; and the delay is in closed
// form 1 - w^(2n)/|theta(jw)|^2 (Thomson 1949), maximally flat. The loss must
// keep the bound that LeastOrder gives up by.
func TestBesselRoots(t *testing.T) {
	worst, growth := 0.0, 0.0
	for n := 1; n <= MaxOrder; n++ {
		sum, logProduct, logFactorial := complex(0, 0), 0.0, 0.0
		for k := 1; k <= n; k++ {
			logFactorial += math.Log(float64(2*k - 1))
		}
		a := unitDelayBessel(n)
		for _, r := range a.poles {
			sum += r
			logProduct += math.Log(cmplx.Abs(r))
		}
		name := "order " + strconv.Itoa(n)
		near(t, name+" sum", real(sum)/float64(n*(n+1)/2), -1, 1e-14)
		near(t, name+" imaginary sum", imag(sum), 0, 0)
		near(t, name+" product", logProduct, logFactorial, 1e-13)
		atFirst := a.loss(1e-3) / 1e-6
		for w := 0.01; w < 200; w *= 1.05 {
			loss := a.loss(w)
			off := a.delay(w) - 1 + math.Exp(2*float64(n)*math.Log(w)-2*logFactorial-loss*math.Ln10/10)
			near(t, fmt.Sprintf("%s delay at %g", name, w), off, 0, 1e-12)
			worst, growth = math.Max(worst, math.Abs(off)), math.Max(growth, loss/(w*w)/atFirst)
		}
	}
	t.Logf("delay off its closed form by at most %.2g; growth of the loss %.4f, allowed %g", worst, growth, besselGrowth)
	if !(growth > 1.3 && growth <= besselGrowth) {
		t.Errorf("the loss grows up to %.4f times as the square, the bound is %g", growth, besselGrowth)
	}
}
