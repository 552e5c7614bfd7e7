//go:build !purego

package machine

import "golang.org/x/sys/cpu"

func (k Kernel) available() bool {
	switch k {
	case Portable:
		return true
	case AVX2:
		return cpu.X86.HasAVX2 && cpu.X86.HasFMA
	case AVX512:
		return cpu.X86.HasAVX512F && AVX2.available() // what it leaves to AVX2 is short
	}
	return false
}
