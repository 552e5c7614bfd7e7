package response

import (
	"encoding/csv"
	"math"
	"math/big"
	"math/cmplx"
	"os"
	"strconv"
	"testing"
)

// near fails unless got is within tol of want; NaN fails.
func near(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s: got %.15g, want %.15g, off by %.3g, allowed %.3g", what, got, want, math.Abs(got-want), tol)
	}
}

// allPass2 has poles r e^(+-j theta).
func allPass2(r, theta float64) Section {
	return Section{B0: r * r, B1: -2 * r * math.Cos(theta), B2: 1, A1: -2 * r * math.Cos(theta), A2: r * r}
}

// TestGroupDelayClosedForms compares with closed forms tabled for five
// textbook systems (Oppenheim & Schafer; testdata/README.md). The table has
// ten decimals, hence the tolerance.
func TestGroupDelayClosedForms(t *testing.T) {
	delay7 := []Section{{B2: 1}, {B2: 1}, {B2: 1}, {B1: 1}}
	systems := map[string]func(omega float64) float64{
		"delay_7":                delayOf(delay7...),
		"fir_1_2_3_2_1":          delayOf(Section{B0: 1, B1: 1, B2: 1}, Section{B0: 1, B1: 1, B2: 1}),
		"one_pole_a_0.9":         delayOf(Section{B0: 1, A1: -0.9}),
		"allpass1_c_-0.5":        delayOf(Section{B0: -0.5, B1: 1, A1: -0.5}),
		"allpass2_r_0.9_theta_1": delayOf(allPass2(0.9, 1)),
	}
	rows := readCSV(t, "testdata/group-delay-closed-forms.csv")
	omegas := []float64{0, 0.1, 0.5, 1, 2, 3}
	for _, row := range rows[1:] {
		delay, known := systems[row[0]]
		if !known {
			t.Fatalf("the table has a system %q that is not tested", row[0])
		}
		for i, omega := range omegas {
			near(t, row[0], delay(omega), number(t, row[2+i]), 1e-10)
		}
	}
	if len(rows)-1 != len(systems) {
		t.Errorf("%d systems in the table, %d tested", len(rows)-1, len(systems))
	}
}

func delayOf(s ...Section) func(float64) float64 {
	return func(omega float64) float64 { return SectionsGroupDelay(s, omega) }
}

func readCSV(t *testing.T, name string) [][]string {
	t.Helper()
	f, err := os.Open(name)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rows, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	return rows
}

func number(t *testing.T, s string) float64 {
	t.Helper()
	v, err := strconv.ParseFloat(s, 64)
	if err != nil {
		t.Fatal(err)
	}
	return v
}

// TestFirstOrderFormulas checks one-pole and first-order all-pass delays on a
// grid against the closed forms themselves (Oppenheim & Schafer), the grid
// reaching both ends. The forms cancel near their own zeros, by about 1e-15
// times their largest term.
func TestFirstOrderFormulas(t *testing.T) {
	const a, c = 0.9, -0.5
	for i := range 101 {
		omega := math.Pi * float64(i) / 100
		cos := math.Cos(omega)
		onePole := (a*cos - a*a) / (1 - 2*a*cos + a*a)
		near(t, "one pole", SectionsGroupDelay([]Section{{B0: 1, A1: -a}}, omega), onePole, 1e-13)
		allPass := (1 - c*c) / (1 + 2*c*cos + c*c)
		near(t, "all-pass", SectionsGroupDelay([]Section{{B0: c, B1: 1, A1: c}}, omega), allPass, 1e-13)
	}
}

// TestAllPassIntegral: the group delay of an all-pass of order n integrates to
// n pi over 0..pi (standard identity). The trapezoid rule converges
// geometrically on a periodic analytic function, here as 0.95^4096.
func TestAllPassIntegral(t *testing.T) {
	s := []Section{allPass2(0.9, 1), allPass2(0.95, 2.5), {B0: -0.5, B1: 1, A1: -0.5}}
	const n = 2048
	sum := (SectionsGroupDelay(s, 0) + SectionsGroupDelay(s, math.Pi)) / 2
	for i := 1; i < n; i++ {
		sum += SectionsGroupDelay(s, math.Pi*float64(i)/n)
	}
	near(t, "integral/pi", sum/n, 5, 1e-11)
}

// TestZeroOnCircle: a notch and zeros at z = 1 and z = -1 contribute the limit
// of half a sample a zero, at the very frequency and on both sides of it.
func TestZeroOnCircle(t *testing.T) {
	const omega0 = 0.3
	cases := []struct {
		name  string
		s     Section
		omega float64
		zeros int
	}{
		{"notch", Section{B0: 1, B1: -2 * math.Cos(omega0), B2: 1}, omega0, 2},
		{"[1 0 1]", Section{B0: 1, B2: 1}, math.Pi / 2, 2},
		{"double zero at 1", Section{B0: 1, B1: -2, B2: 1}, 0, 2},
		{"zero at 1", Section{B0: 3, B1: -3}, 0, 1},
		{"zero at -1", Section{B0: 3, B1: 3}, math.Pi, 1},
		{"zeros at 1 and -1", Section{B0: 1, B2: -1}, 0, 2},
	}
	for _, c := range cases {
		for _, away := range []float64{0, 1e-12, 1e-6, 0.1} {
			omega := math.Abs(c.omega - away)
			near(t, c.name, SectionsGroupDelay([]Section{c.s}, omega), float64(c.zeros)/2, 1e-12)
		}
	}
	// A zero at 1 beside another real one: 1/2 + the delay -c/(1-c) of 1 - c/z.
	mixed := []Section{{B0: 1, B1: -1.5, B2: 0.5}}
	near(t, "zero at 1 with 0.5", SectionsGroupDelay(mixed, 0), 0.5-1, 1e-12)
	near(t, "beside it", SectionsGroupDelay(mixed, 1e-9), 0.5-1, 1e-9)
	if d := SectionsGroupDelay([]Section{{}}, 1); !math.IsNaN(d) {
		t.Errorf("a section of zero gain has a delay of %g, want NaN", d)
	}
}

// TestExactZeros: zeros at the ends of the axis give exactly nothing.
func TestExactZeros(t *testing.T) {
	cases := []struct {
		s     Section
		omega float64
	}{
		{Section{B0: 0.3, B1: -0.6, B2: 0.3, A1: -1.99, A2: 0.991}, 0},
		{Section{B0: 0.3, B1: -0.3, A1: -0.99}, 0},
		{Section{B0: 0.1, B1: 0.2, B2: 0.1, A1: -1.99, A2: 0.991}, math.Pi},
		{Section{B0: 0.1, B1: 0.1, A1: -0.9}, math.Pi},
	}
	for _, c := range cases {
		if h := SectionsAt([]Section{c.s}, c.omega); h != 0 {
			t.Errorf("%+v at %g: got %g, want exactly 0", c.s, c.omega, h)
		}
	}
}

// TestLowCornerEvaluation compares with 200-bit arithmetic on the very same
// coefficients: a resonance of Q 2.5 at 20 Hz, 192 kHz, where the plain formula
// loses half the digits. Sections reach a few 1e-16 times Q.
func TestLowCornerEvaluation(t *testing.T) {
	const corner = 2 * math.Pi * 20 / 192000
	r := 1 - corner/5
	s := Section{B0: 1, B1: -2, B2: 1, A1: -2 * r * math.Cos(corner), A2: r * r}
	worst, worstDelay := 0.0, 0.0
	for _, ratio := range []float64{0.01, 0.1, 0.5, 0.9, 1, 1.01, 1.5, 10, 100, 4000} {
		omega := corner * ratio
		want, wantDelay := preciseAt(s, omega)
		worst = math.Max(worst, cmplx.Abs(SectionsAt([]Section{s}, omega)-want)/cmplx.Abs(want))
		delay := SectionsGroupDelay([]Section{s}, omega)
		worstDelay = math.Max(worstDelay, math.Abs(delay-wantDelay)/(1+math.Abs(wantDelay)))
	}
	t.Logf("worst relative error: response %.2g, group delay %.2g", worst, worstDelay)
	near(t, "response error", worst, 0, 1e-14)
	near(t, "group delay error", worstDelay, 0, 1e-13)
}

// preciseAt evaluates one section in big.Float from a series for sine and
// cosine: response, and delay as Re{N'/N - D'/D} with N' = sum n b_n z^-n.
func preciseAt(s Section, omega float64) (complex128, float64) {
	sin, cos := bigSinCos(omega)
	b := [3]float64{s.B0, s.B1, s.B2}
	a := [3]float64{1, s.A1, s.A2}
	n, nRamp := bigPoly(b, cos, sin)
	d, dRamp := bigPoly(a, cos, sin)
	h, delay, delayD := n.over(d), nRamp.over(n), dRamp.over(d)
	re, _ := h.re.Float64()
	im, _ := h.im.Float64()
	samples, _ := new(big.Float).Sub(delay.re, delayD.re).Float64()
	return complex(re, im), samples
}

func bigNumber(v float64) *big.Float { return new(big.Float).SetPrec(200).SetFloat64(v) }

func bigMul(a, b *big.Float) *big.Float { return new(big.Float).SetPrec(200).Mul(a, b) }

func bigAdd(a, b *big.Float) *big.Float { return new(big.Float).SetPrec(200).Add(a, b) }

func bigSinCos(x float64) (sin, cos *big.Float) {
	sin, cos = bigNumber(0), bigNumber(0)
	term := bigNumber(1)
	for k := range 60 {
		sum := cos
		if k%2 == 1 {
			sum = sin
		}
		if k%4 < 2 {
			sum.Add(sum, term)
		} else {
			sum.Sub(sum, term)
		}
		term = bigMul(term, bigNumber(x))
		term.Quo(term, bigNumber(float64(k+1)))
	}
	return sin, cos
}

type bigComplex struct{ re, im *big.Float }

func (a bigComplex) times(b bigComplex) bigComplex {
	minus := new(big.Float).Neg(bigMul(a.im, b.im))
	return bigComplex{bigAdd(bigMul(a.re, b.re), minus), bigAdd(bigMul(a.re, b.im), bigMul(a.im, b.re))}
}

func (a bigComplex) over(b bigComplex) bigComplex {
	square := bigAdd(bigMul(b.re, b.re), bigMul(b.im, b.im))
	q := a.times(bigComplex{b.re, new(big.Float).Neg(b.im)})
	return bigComplex{q.re.Quo(q.re, square), q.im.Quo(q.im, square)}
}

// bigPoly returns sum c_n z^-n and sum n c_n z^-n.
func bigPoly(c [3]float64, cos, sin *big.Float) (value, ramped bigComplex) {
	step := bigComplex{cos, new(big.Float).Neg(sin)}
	power := bigComplex{bigNumber(1), bigNumber(0)}
	value, ramped = bigComplex{bigNumber(0), bigNumber(0)}, bigComplex{bigNumber(0), bigNumber(0)}
	for n, v := range c {
		term := power.times(bigComplex{bigNumber(v), bigNumber(0)})
		value = bigComplex{bigAdd(value.re, term.re), bigAdd(value.im, term.im)}
		k := bigNumber(float64(n))
		ramped = bigComplex{bigAdd(ramped.re, bigMul(k, term.re)), bigAdd(ramped.im, bigMul(k, term.im))}
		power = power.times(step)
	}
	return value, ramped
}

// TestImpulse compares with the closed form a^n of one pole, and with the
// transform: the response of the impulse response is the response.
func TestImpulse(t *testing.T) {
	for n, h := range Impulse([]Section{{B0: 1, A1: -0.9}}, 50) {
		near(t, "0.9^n", h, math.Pow(0.9, float64(n)), 1e-15)
	}
	s := []Section{allPass2(0.9, 1), {B0: 1, B1: -1, A1: -0.5}}
	h := Impulse(s, 600) // 0.9^600 is 4e-28
	for omega := 0.0; omega <= math.Pi; omega += 0.1 {
		near(t, "transform", cmplx.Abs(TapsAt(h, omega)-SectionsAt(s, omega)), 0, 1e-13)
	}
	if len(Impulse(nil, 0)) != 0 {
		t.Error("no samples were asked for")
	}
	if one := Impulse(nil, 3); one[0] != 1 || one[1] != 0 || one[2] != 0 {
		t.Errorf("the empty cascade is not the identity: %v", one)
	}
}
