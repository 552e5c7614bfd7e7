package abreast

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"fettle/filter/response"
)

// fused is what a chain must equal bit for bit: one section after the other, one
// channel after the other. x is from Reset on.
func fused(sections []response.Section, x []float64) []float64 {
	y := slices.Clone(x)
	for place, s := range sections {
		c1, c2 := math.FMA(-s.A1, s.B0, s.B1), math.FMA(-s.A2, s.B0, s.B2)
		state := make([]float64, 3)
		r, q, e := &state[0], &state[1], &state[2]
		for n, v := range y {
			if (n+skew*place)%Period == 0 {
				quieten(state)
			}
			y[n] = math.FMA(s.B0, v, *r)
			*q, *r = *r, math.FMA(-s.A1, *r, math.FMA(-s.A2, *q, math.FMA(c1, v, *e)))
			*e = c2 * v
		}
	}
	return y
}

// resonances are sections with poles of radius 0.3 to 0.999 or so and zeros
// anywhere, of about unit gain.
func resonances(seed uint64, count int) []response.Section {
	r := rand.New(rand.NewPCG(seed, 0))
	sections := make([]response.Section, count)
	for i := range sections {
		radius := 1 - math.Pow(10, -0.15-2.85*r.Float64())
		angle := math.Pi * r.Float64()
		g := 1 - radius
		sections[i] = response.Section{
			B0: g * (1 + r.Float64()), B1: g * (2*r.Float64() - 1), B2: g * r.NormFloat64(),
			A1: -2 * radius * math.Cos(angle), A2: radius * radius,
		}
	}
	return sections
}

// noise is evenly spread over -size to size.
func noise(seed uint64, channels, frames int, size float64) [][]float64 {
	r := rand.New(rand.NewPCG(seed, 1))
	x := planes(channels, frames)
	for _, v := range x {
		for i := range v {
			v[i] = size * (2*r.Float64() - 1)
		}
	}
	return x
}

func planes(channels, frames int) [][]float64 {
	x := make([][]float64, channels)
	for c := range x {
		x[c] = make([]float64, frames)
	}
	return x
}

// run puts all of src through a pass, cut into pieces of the lengths next gives.
func (p *pass) run(dst, src [][]float64, next func() int) {
	for from := 0; from < len(src[0]); {
		to := min(len(src[0]), from+next())
		p.filter(dst, src, from, to, (Period-from%Period)%Period)
		from = to
	}
}

// pieces are of a length, or with 0 of random ones round the chain's own.
func pieces(length int) func() int {
	if length > 0 {
		return func() int { return length }
	}
	r := rand.New(rand.NewPCG(2, 0))
	return func() int { return 1 + r.IntN([]int{5, 70, 700}[r.IntN(3)]) }
}

func fill(x []float64, v float64) {
	for i := range x {
		x[i] = v
	}
}

func sameBits(t *testing.T, what string, got, want []float64) {
	t.Helper()
	for i := range want {
		if got[i] != want[i] {
			t.Fatalf("%s: sample %d is %v, want %v", what, i, got[i], want[i])
		}
	}
	if len(got) != len(want) {
		t.Fatalf("%s: %d samples, want %d", what, len(got), len(want))
	}
}
