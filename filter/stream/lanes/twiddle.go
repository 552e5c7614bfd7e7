package lanes

import (
	"math"
	"math/bits"
	"sync"
)

// factor holds the powers w, w^2 and w^3 that a radix-4 butterfly needs. A
// radix-2 one needs the square only. The assembly reads it as six float64.
type factor struct{ w1, w2, w3 complex128 }

// shared is the longest table anyone has asked for. A table is never written
// to after it is published, so a prefix of it may be read without the lock.
var shared struct {
	sync.Mutex
	table []factor
}

// table returns the factors of blocks 0 to count-1, count a power of two.
// Block b has w = exp(-2 pi j t/4), t being the bit-reversed fraction of b:
// 0, 1/2, 1/4, 3/4, 1/8 and so on. As t does not depend on how many blocks
// there are, every pass of every transform reads a part of one table.
func table(count int) []factor {
	shared.Lock()
	defer shared.Unlock()
	if len(shared.table) < count {
		shared.table = makeTable(count)
	}
	return shared.table[:count]
}

// makeTable is table without the shared one: a table of its own.
func makeTable(count int) []factor {
	table := make([]factor, count)
	width := bits.Len(uint(count)) - 1
	for b := range table {
		turn := int(bits.Reverse64(uint64(b)) >> (64 - width))
		table[b] = factor{unit(turn, 4*count), unit(2*turn, 4*count), unit(3*turn, 4*count)}
	}
	return table
}

// unit returns exp(-2 pi j num/den) for 0 <= num < den, den a multiple of 4.
// The angle is reduced to the first octant in whole numbers, so that Sincos
// only sees arguments where it is accurate and symmetric points are symmetric.
func unit(num, den int) complex128 {
	octant, rest := 8*num/den, 8*num%den
	if octant%2 == 1 {
		rest = den - rest
	}
	s, c := math.Sincos(math.Pi / 4 * float64(rest) / float64(den))
	if rest == den {
		s, c = math.Sqrt2/2, math.Sqrt2/2 // Sincos has them differ by a rounding
	}
	if q := octant % 4; q == 1 || q == 2 {
		s, c = c, s
	}
	if octant >= 2 && octant < 6 {
		c = -c
	}
	if octant < 4 {
		s = -s
	}
	return complex(c, s)
}
