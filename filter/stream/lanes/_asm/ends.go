package main

import (
	"math/bits"

	. "github.com/mmcloughlin/avo/build"
	. "github.com/mmcloughlin/avo/operand"
)

// outermost writes a function that loops over the places of the first n elements
// of four rows: step elements from one to the next in x, row points in the two
// signals that are the real and imaginary parts.
func (k kernel) outermost(name string, body func(x, re, im []Mem)) {
	TEXT(name+k.name, NOSPLIT, "func(x *float64, step int, re, im *float64, row, n int)")
	Pragma("noescape")
	x := Load(Param("x"), GP64())
	step := Load(Param("step"), GP64())
	re := Load(Param("re"), GP64())
	im := Load(Param("im"), GP64())
	row := Load(Param("row"), GP64())
	n := Load(Param("n"), GP64())
	Comment("step and row in bytes, and three times that")
	SHLQ(Imm(uint64(bits.TrailingZeros(uint(k.element())))), step)
	SHLQ(Imm(3), row)
	step3, row3 := GP64(), GP64()
	LEAQ(Mem{Base: step, Index: step, Scale: 2}, step3)
	LEAQ(Mem{Base: row, Index: row, Scale: 2}, row3)

	Label("butterfly")
	body(rows(x, step, step3), rows(re, row, row3), rows(im, row, row3))
	ADDQ(U32(k.element()), x)
	ADDQ(U32(k.width), re)
	ADDQ(U32(k.width), im)
	DECQ(n)
	JNZ(LabelRef("butterfly"))
	VZEROUPPER()
	RET()
}

// load4 is split4 of block 0, whose factors are 1, from two signals.
func (k kernel) load4() {
	k.outermost("load4", func(x, re, im []Mem) {
		var p [4]point
		for i := range p {
			p[i] = k.point()
			VMOVUPD(re[i], p[i].re)
			VMOVUPD(im[i], p[i].im)
		}
		k.storeAll(k.evaluate(p), x)
	})
}

// store4 is join4 of block 0 to two signals.
func (k kernel) store4() {
	k.outermost("store4", func(x, re, im []Mem) {
		for i, p := range k.join(k.loadAll(x)) {
			VMOVUPD(p.re, re[i])
			VMOVUPD(p.im, im[i])
		}
	})
}
