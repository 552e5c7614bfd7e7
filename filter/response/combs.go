package response

import (
	"math"
	"math/cmplx"
	"runtime"
	"sync"

	"gonum.org/v1/gonum/dsp/fourier"
)

// combs makes a transform a comb at a time: comb r holds every P-th bin from bin r on.
// With K = P M,
//
//	X[r + P m] = sum over i < M of e^(-j2πmi/M) e^(-j2πri/K) sum over q of x[i + q M] e^(-j2πrq/P)
//
// is a transform of M points. So no work is done on the zeros that pad a sequence, it
// stays in the near caches, and memory is needed for a few combs only. Combs 0 to P/2
// hold the bins 0 to K/2.
//
// Source: Markel 1971, IEEE Trans. Audio and Electroacoustics 19 (pruned transforms);
// Oppenheim & Schafer, chapter on the fast Fourier transform (decimation in frequency).
type combs struct {
	size   int          // K
	apart  int          // P
	points int          // M
	makers []*combMaker // they work side by side
}

// combMaker makes one comb after another.
type combMaker struct {
	*combs
	fft       *fourier.CmplxFFT
	rotations [fineTurns]complex128 // e^(-j2πri/K) of the comb at hand, i < fineTurns
}

const (
	// A comb has at least leastComb points and so many that a sequence is folded about
	// mostFolds times at most: fewer would cost more in gathering than they save.
	leastComb = 1 << 10
	mostFolds = 8
	fineTurns = 64
	// Of manyCombs or more, as many are made together as share a line of the cache:
	// the bins of one comb alone are a power of two apart and would evict each other.
	manyCombs = 64
	ofMany    = 4
	ofFew     = 2
	// Longer combs are made one by one, for the memory that they take.
	longComb = 1 << 15
)

func newCombs(size, length int) *combs {
	least := max(leastComb, length/mostFolds)
	c := &combs{size: size, apart: 1}
	for size%(2*c.apart) == 0 && size/(2*c.apart) >= least {
		c.apart *= 2
	}
	c.points = size / c.apart
	for range min(c.together(), runtime.GOMAXPROCS(0)) {
		c.makers = append(c.makers, &combMaker{combs: c, fft: fourier.NewCmplxFFT(c.points)})
	}
	return c
}

// together is how many combs are made before their bins are visited.
func (c *combs) together() int {
	switch {
	case c.points > longComb:
		return 1
	case c.apart < manyCombs:
		return ofFew
	}
	return ofMany
}

func (c *combs) within(first, last int, visit func(k int, v []complex128), sequences []Sequence) {
	made := make([][][]complex128, c.together()) // [comb][sequence]
	for i := range made {
		for range sequences {
			made[i] = append(made[i], make([]complex128, c.points))
		}
	}
	v := make([]complex128, len(sequences))
	for r := 0; r <= c.apart/2; r += len(made) {
		here := made[:min(len(made), c.apart/2+1-r)]
		c.share(len(here), func(m *combMaker, i int) {
			m.turnTo(r + i)
			for s := range sequences {
				m.transform(here[i][s], sequences[s], r+i)
			}
		})
		for m := range c.points {
			for i, comb := range here {
				k, conjugate, ok := c.bin(r+i, m)
				if !ok || k < first || k > last {
					continue
				}
				for s := range v {
					v[s] = comb[s][m]
					if conjugate {
						v[s] = cmplx.Conj(v[s])
					}
				}
				visit(k, v)
			}
		}
	}
}

// share has the makers do jobs 0 to n-1.
func (c *combs) share(n int, do func(m *combMaker, i int)) {
	var done sync.WaitGroup
	some := func(w int) {
		for i := w; i < n; i += len(c.makers) {
			do(c.makers[w], i)
		}
	}
	for w := 1; w < len(c.makers); w++ {
		done.Go(func() { some(w) })
	}
	some(0)
	done.Wait()
}

// bin is the bin from 0 to K/2 that point m of comb r stands for, itself or
// by its conjugate. It is not ok where another point stands for the same: combs 0 and
// P/2 are their own mirrors.
func (c *combs) bin(r, m int) (k int, conjugate, ok bool) {
	k = r + c.apart*m
	if 2*k <= c.size {
		return k, false, true
	}
	return c.size - k, true, r != 0 && 2*r != c.apart
}

func (c *combs) mapped(x []float64, f func(complex128) complex128, n int) []float64 {
	out, comb, m := make([]float64, n), make([]complex128, c.points), c.makers[0]
	for r := 0; r <= c.apart/2; r++ {
		m.turnTo(r)
		m.transform(comb, Sequence{X: x}, r)
		for i, v := range comb {
			comb[i] = f(v)
		}
		m.fft.Sequence(comb, comb)
		share := 2 / float64(c.size) // the comb's and its conjugates'
		if r == 0 || 2*r == c.apart {
			share /= 2
		}
		turns := NewTurns(2*math.Pi*float64(r)/float64(c.size), 0)
		for i := range out {
			v, z := comb[i%c.points], turns.Next()
			out[i] += share * (real(v)*real(z) - imag(v)*imag(z))
		}
	}
	return out
}

// turnTo makes ready for comb r.
func (m *combMaker) turnTo(r int) {
	for i := range m.rotations {
		m.rotations[i] = fraction(r*i, m.size)
	}
}

// transform makes comb r of a sequence.
func (m *combMaker) transform(comb []complex128, s Sequence, r int) {
	clear(comb)
	for from := 0; from < len(s.X); from += m.points {
		s.addTo(comb, from, fraction(r*(from/m.points), m.apart))
	}
	for from := 0; r > 0 && from < len(comb); from += fineTurns {
		coarse := fraction(r*from, m.size)
		for i, v := range comb[from:min(from+fineTurns, len(comb))] {
			comb[from+i] = v * (coarse * m.rotations[i])
		}
	}
	m.fft.Coefficients(comb, comb)
}

// addTo adds the samples from an index on, turned, to as much of a comb as they fill.
func (s Sequence) addTo(comb []complex128, from int, by complex128) {
	re, im := real(by), imag(by)
	x := s.X[from:min(len(s.X), from+len(comb))]
	if !s.Moments {
		for i, v := range x {
			comb[i] += complex(v*re, v*im)
		}
		return
	}
	first := float64(from) - s.Origin
	for i, v := range x {
		v *= first + float64(i)
		comb[i] += complex(v*re, v*im)
	}
}
