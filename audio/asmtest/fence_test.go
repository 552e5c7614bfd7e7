//go:build unix

package asmtest

import (
	"runtime/debug"
	"testing"
	"unsafe"
)

// TestFenced: what is inside can be written, what is just outside cannot be read.
func TestFenced(t *testing.T) {
	defer debug.SetPanicOnFault(debug.SetPanicOnFault(true))
	for _, n := range []int{0, 1, 3, 4096, 5000} {
		for _, front := range []bool{false, true} {
			x := Fenced[float64](n, front)
			for i := range x {
				x[i] = 1
			}
			outside := unsafe.Add(unsafe.Pointer(unsafe.SliceData(x)), 8*n)
			if front {
				outside = unsafe.Add(unsafe.Pointer(unsafe.SliceData(x)), -1)
			}
			if !faults((*byte)(outside)) {
				t.Errorf("%d numbers, front %t: nothing stops a read outside", n, front)
			}
		}
	}
}

func faults(p *byte) (fault bool) {
	defer func() { fault = recover() != nil }()
	sink = *p
	return false
}

var sink byte
