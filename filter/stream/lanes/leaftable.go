//go:build amd64 && !purego

package lanes

// A leaf table holds, for each group of as many blocks as there are lanes, what
// the leaf function reads, in the order in which it does: vectors with a lane a
// block, real parts and then imaginary parts.

// leafTable4 is for blocks of four points: the three factors, the spectrum.
func leafTable4(spectrum []complex128, factors []factor) []float64 {
	t := newLeafTable(len(spectrum), 4, 3+4)
	for first := 0; first < len(spectrum)/4; first += 4 {
		t.add(func(b int) complex128 { return factors[first+b].w1 })
		t.add(func(b int) complex128 { return factors[first+b].w2 })
		t.add(func(b int) complex128 { return factors[first+b].w3 })
		for i := range 4 {
			t.add(func(b int) complex128 { return spectrum[4*(first+b)+i] })
		}
	}
	return t.values
}

// leafTable8 is for blocks of eight points: the three factors of the radix-4 pass,
// then twice the factor of a pair of inner blocks and the spectrum of their four
// points. Inner block c has the factor exp(-pi j t) with the fraction t of c:
// if c is even that is w of c/2, if it is odd -j times that.
func leafTable8(spectrum []complex128, factors []factor) []float64 {
	t := newLeafTable(len(spectrum), 8, 3+2+8)
	for first := 0; first < len(spectrum)/8; first += 8 {
		t.add(func(b int) complex128 { return factors[first+b].w1 })
		t.add(func(b int) complex128 { return factors[first+b].w2 })
		t.add(func(b int) complex128 { return factors[first+b].w3 })
		for pair := range 2 {
			t.add(func(b int) complex128 { return factors[2*(first+b)+pair].w1 })
			for i := range 4 {
				t.add(func(b int) complex128 { return spectrum[8*(first+b)+4*pair+i] })
			}
		}
	}
	return t.values
}

type leafTable struct {
	values []float64
	lanes  int
}

func newLeafTable(size, lanes, perGroup int) *leafTable {
	return &leafTable{aligned(size / lanes * 2 * perGroup)[:0], lanes}
}

// add appends a vector.
func (t *leafTable) add(of func(block int) complex128) {
	for b := range t.lanes {
		t.values = append(t.values, real(of(b)))
	}
	for b := range t.lanes {
		t.values = append(t.values, imag(of(b)))
	}
}
