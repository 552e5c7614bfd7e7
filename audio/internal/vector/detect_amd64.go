//go:build !purego

package vector

import "golang.org/x/sys/cpu"

func detect() Set {
	switch {
	case cpu.X86.HasAVX2 && cpu.X86.HasAVX512F:
		return AVX512
	case cpu.X86.HasAVX2:
		return AVX2
	}
	return None
}
