//go:build amd64 && !purego

package lanes

import (
	"fettle/filter/stream/machine"
)

//go:generate go -C _asm run . -out ../passes_amd64.s -stubs ../passes_amd64.go -pkg lanes

// vector convolves in assembly.
//
// A block of N points lies in elements: the real parts of as many neighbouring
// points as a vector has lanes, then their imaginary parts. Down to blocks of one
// element all points of an element undergo the same, with the same factors. The
// last passes are within elements; a leaf function does them for as many elements
// at a time as there are lanes, after turning them so that a lane has a block of
// its own.
//
// Nothing in the assembly checks bounds. With a, b, c, d the points at the same
// place of two or four rows, and w, w^2, w^3 the block's factors:
//
//	split2  a, b = a + w^2 b, a - w^2 b
//	join2   a, b = a + b, (a - b) conj(w^2)
//	split4  evaluate a + w b z + w^2 c z^2 + w^3 d z^3 at z = 1, -1, -j, j
//	join4   undo split4, but for a factor of four
//	load4   split4 with w = 1, from two signals into elements
//	store4  join4 with w = 1, from elements into two signals
//	leaves  what remains to do forward, times the spectrum, and back
//
// A row has n elements; step is from one row to the next. Of several blocks, one
// after another, each has its own factors.
type vector struct {
	*instructions
	size    int
	factors []factor
	leaves  []float64 // the factors and the spectrum as the leaf function reads them
}

// instructions is one set of them.
type instructions struct {
	lanes         int
	load4, store4 func(x *float64, step int, re, im *float64, row, n int)
	split2, join2 func(x *float64, step, n, count int, w *complex128)
	split4, join4 func(x *float64, step, n, count int, w *complex128)
	convolveLeaf  func(x *float64, groups int, table *float64)
	leafTable     func(spectrum []complex128, factors []factor) []float64
}

var instructionsOf = map[machine.Kernel]*instructions{
	machine.AVX2:   {4, load4AVX2, store4AVX2, split2AVX2, join2AVX2, split4AVX2, join4AVX2, leavesAVX2, leafTable4},
	machine.AVX512: {8, load4AVX512, store4AVX512, split2AVX512, join2AVX512, split4AVX512, join4AVX512, leavesAVX512, leafTable8},
}

func newVector(k machine.Kernel, spectrum []complex128, factors []factor) *vector {
	v := &vector{instructions: instructionsOf[k], size: len(spectrum), factors: factors}
	v.leaves = v.leafTable(spectrum, factors)
	return v
}
