//go:build !purego

package abreast

import "fettle/filter/stream/machine"

//go:generate go -C _asm run . -out ../chains_amd64.s -stubs ../chains_amd64.go -pkg abreast

// shapes returns what a kernel has, those of few sections first.
func shapes(k machine.Kernel) []shape {
	switch k {
	case machine.AVX2:
		return []shape{
			{2, 1, chain2x1AVX2}, {4, 1, chain4x1AVX2}, {8, 1, chain8x1AVX2},
			{1, 2, chain1x2AVX2}, {2, 2, chain2x2AVX2}, {4, 2, chain4x2AVX2},
		}
	case machine.AVX512:
		return []shape{
			{2, 1, chain2x1AVX2}, {4, 1, chain4x1AVX2}, {8, 1, chain8x1AVX512}, {16, 1, chain16x1AVX512},
			{1, 2, chain1x2AVX2}, {2, 2, chain2x2AVX2}, {4, 2, chain4x2AVX512}, {8, 2, chain8x2AVX512},
		}
	}
	return portable
}
