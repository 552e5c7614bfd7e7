package figures

import (
	"math"

	"fettle/filter/response"
)

// resync is how many steps a rotation by repeated multiplication may run before
// it is set right again: its error grows by about 1e-16 a step.
const resync = 512

// transformAt is DFT(x) and DFT((n-mid)·x) at the frequency f in Hz, summed
// directly, four samples to a step of the rotation.
func transformAt(x []float64, mid, f, rate float64) (h, nh complex128) {
	w := -2 * math.Pi * f / rate
	r1, r2, r3, r4 := turn(w), turn(2*w), turn(3*w), turn(4*w)
	fours := len(x) &^ 3
	var z complex128
	for n := 0; n < fours; n += 4 {
		if n%(4*resync) == 0 {
			z = turn(w * float64(n))
		}
		a, b, c, d := x[n], x[n+1], x[n+2], x[n+3]
		br, bi := b*real(r1), b*imag(r1)
		cr, ci := c*real(r2), c*imag(r2)
		dr, di := d*real(r3), d*imag(r3)
		sum := complex(a+br+cr+dr, bi+ci+di)
		m := float64(n) - mid
		moment := complex(m*real(sum)+br+2*cr+3*dr, m*imag(sum)+bi+2*ci+3*di)
		h += z * sum
		nh += z * moment
		z *= r4
	}
	for n := fours; n < len(x); n++ {
		v := complex(x[n], 0) * turn(w*float64(n))
		h += v
		nh += complex(float64(n)-mid, 0) * v
	}
	return h, nh
}

// nearBand is DFT(x) and DFT((n-mid)·x) about the middle f0 of one band. There the transform
// of a short block is nearly a polynomial: with d = -2π(f-f0)/fs and m = n less the
// block's middle c,
//
//	Σ x[n] e^(-j2πfn/fs) = e^(jdc) Σ_p (jd)^p/p! Σ m^p x[n] e^(-j2πf0n/fs),
//
// so that after one look at the samples a frequency costs a few terms a block.
type nearBand struct {
	x         []float64
	mid, rate float64
	f0        float64
	block     int // samples of a block; 0: the band is too wide for blocks
	moments   []blockMoments
}

const (
	// With |dm| up to nearly, what nearTerms leave out is 3e-17 of a sample.
	nearly    = 0.1
	nearTerms = 10
	// Shorter blocks cost more than they save.
	leastBlock = 32
)

// blockMoments are Σ m^p x[n] e^(-j2πf0n/fs), p = 0 to nearTerms.
type blockMoments [nearTerms + 1]complex128

func newNearBand(x []float64, mid float64, b Band, rate float64) *nearBand {
	n := &nearBand{x: x, mid: mid, rate: rate, f0: (b.Lower + b.Upper) / 2}
	block := min(int(2*nearly*rate/(math.Pi*b.width())), len(x))
	if block < leastBlock {
		return n
	}
	n.block = block
	turns := response.NewTurns(-2*math.Pi*n.f0/rate, 0)
	for from := 0; from < len(x); from += block {
		var moments blockMoments
		for i, v := range x[from:min(len(x), from+block)] {
			m, z := float64(i)-n.middle(), turns.Next()
			re, im := v*real(z), v*imag(z)
			for p := range moments {
				moments[p] += complex(re, im)
				re, im = re*m, im*m
			}
		}
		n.moments = append(n.moments, moments)
	}
	return n
}

// middle of a block, from its first sample.
func (n *nearBand) middle() float64 { return float64(n.block-1) / 2 }

// at is the transforms at f Hz, within the band.
func (n *nearBand) at(f float64) (h, nh complex128) {
	if n.block == 0 {
		return transformAt(n.x, n.mid, f, n.rate)
	}
	d := -2 * math.Pi * (f - n.f0) / n.rate
	terms := taylor(d)
	turns := response.NewTurns(d*float64(n.block), 0)
	for i := range n.moments {
		m, z := &n.moments[i], turns.Next()
		sum := terms.sum(m[:nearTerms])
		late := float64(i*n.block) + n.middle() - n.mid
		h += z * sum
		nh += z * (complex(late, 0)*sum + terms.sum(m[1:]))
	}
	first := turn(d * n.middle())
	return first * h, first * nh
}

// series is the coefficients of (jd)^p/p!, even and odd powers, without the j.
type series [nearTerms]float64

func taylor(d float64) *series {
	s := series{1, d}
	for p := 2; p < nearTerms; p++ {
		s[p] = -s[p-2] * d * d / float64(p*(p-1))
	}
	return &s
}

func (s *series) sum(m []complex128) complex128 {
	var even, odd complex128
	for p := 0; p < nearTerms; p += 2 {
		even += complex(s[p]*real(m[p]), s[p]*imag(m[p]))
		odd += complex(s[p+1]*real(m[p+1]), s[p+1]*imag(m[p+1]))
	}
	return even + complex(-imag(odd), real(odd))
}
