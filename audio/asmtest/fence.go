package asmtest

import "unsafe"

// Fenced returns a slice of n values in memory of its own. Reading or writing
// beyond its end, or, if front is set, before its beginning, stops the program:
// there the memory belongs to no one. On systems that cannot do that it is just a
// slice. The memory is never given back.
func Fenced[T byte | float64](n int, front bool) []T {
	var one T
	bytes := n * int(unsafe.Sizeof(one))
	b := fenced(bytes, front)
	return unsafe.Slice((*T)(unsafe.Pointer(unsafe.SliceData(b))), n)
}
