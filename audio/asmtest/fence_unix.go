//go:build unix

package asmtest

import (
	"os"
	"syscall"
)

// fenced makes pages of which the first and the last may not be touched, and
// returns n bytes at one end of the others.
func fenced(n int, front bool) []byte {
	page := os.Getpagesize()
	inner := (n + page) / page * page // a byte at the least
	all, err := syscall.Mmap(-1, 0, inner+2*page, syscall.PROT_READ|syscall.PROT_WRITE, syscall.MAP_PRIVATE|syscall.MAP_ANON)
	if err != nil {
		panic("asmtest: " + err.Error())
	}
	for _, fence := range [][]byte{all[:page], all[page+inner:]} {
		if err := syscall.Mprotect(fence, syscall.PROT_NONE); err != nil {
			panic("asmtest: " + err.Error())
		}
	}
	if front {
		return all[page : page+n : page+n]
	}
	return all[page+inner-n : page+inner : page+inner]
}
