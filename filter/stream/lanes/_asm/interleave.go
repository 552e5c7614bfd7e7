package main

import (
	. "github.com/mmcloughlin/avo/build"
	. "github.com/mmcloughlin/avo/operand"
	"github.com/mmcloughlin/avo/reg"
)

// interleave4 writes the function that moves four points of four signals at a
// time into place. With both vector widths an element has room for it.
func interleave4() {
	TEXT("interleave4AVX2", NOSPLIT, "func(x *float64, step int, signals *[4]*float64, n int)")
	Pragma("noescape")
	x, step, step3, signals, left := interleaveParams()
	Label("points")
	prefetch(signals, x, step, step3)
	var in [4]reg.VecVirtual
	for i := range in {
		in[i] = YMM()
		VMOVUPD(Mem{Base: signals[i]}, in[i])
		ADDQ(Imm(32), signals[i])
	}
	for i, v := range transpose(in) {
		VMOVUPD(v, rows(x, step, step3)[i])
	}
	interleaveNext(x, step, left)
}

// deinterleave4 writes the inverse of interleave4.
func deinterleave4() {
	TEXT("deinterleave4AVX2", NOSPLIT, "func(x *float64, step int, signals *[4]*float64, n int)")
	Pragma("noescape")
	x, step, step3, signals, left := interleaveParams()
	Label("points")
	prefetch(signals, x, step, step3)
	var in [4]reg.VecVirtual
	for i := range in {
		in[i] = YMM()
		VMOVUPD(rows(x, step, step3)[i], in[i])
	}
	for i, v := range transpose(in) {
		VMOVUPD(v, Mem{Base: signals[i]})
		ADDQ(Imm(32), signals[i])
	}
	interleaveNext(x, step, left)
}

// interleaveParams loads the parameters; step becomes bytes.
func interleaveParams() (x, step, step3 reg.GPVirtual, signals [4]reg.GPVirtual, left reg.GPVirtual) {
	x, step, step3 = GP64(), GP64(), GP64()
	Load(Param("x"), x)
	Load(Param("step"), step)
	table := Load(Param("signals"), GP64())
	left = GP64()
	Load(Param("n"), left)
	for i := range signals {
		signals[i] = GP64()
		MOVQ(Mem{Base: table, Disp: 8 * i}, signals[i])
	}
	SHLQ(Imm(3), step)
	LEAQ(Mem{Base: step, Index: step, Scale: 2}, step3)
	return x, step, step3, signals, left
}

// prefetch asks for what comes 64 points later in the signals and 16 or 8 later
// in x. A batch of blocks is larger than a second-level cache, and both ways
// what is to be written must be fetched first: with this, loading and storing
// 16384 points takes 35 % less time with AVX2 and 15 % with AVX-512. The passes
// gain nothing from the like. Asking past the end of memory is allowed.
func prefetch(signals [4]reg.GPVirtual, x, step, step3 reg.Register) {
	for _, s := range signals {
		PREFETCHT0(Mem{Base: s, Disp: 64 * 8})
	}
	for _, r := range rows(x, step, step3) {
		PREFETCHT0(r.Offset(1024))
	}
}

func interleaveNext(x, step, left reg.GPVirtual) {
	LEAQ(Mem{Base: x, Index: step, Scale: 4}, x)
	SUBQ(Imm(4), left)
	JNZ(LabelRef("points"))
	VZEROUPPER()
	RET()
}

// transpose turns four rows of four values into columns.
func transpose(r [4]reg.VecVirtual) [4]reg.VecVirtual {
	even01, odd01, even23, odd23 := YMM(), YMM(), YMM(), YMM()
	VUNPCKLPD(r[1], r[0], even01)
	VUNPCKHPD(r[1], r[0], odd01)
	VUNPCKLPD(r[3], r[2], even23)
	VUNPCKHPD(r[3], r[2], odd23)
	c := [4]reg.VecVirtual{YMM(), YMM(), YMM(), YMM()}
	VPERM2F128(Imm(0x20), even23, even01, c[0])
	VPERM2F128(Imm(0x20), odd23, odd01, c[1])
	VPERM2F128(Imm(0x31), even23, even01, c[2])
	VPERM2F128(Imm(0x31), odd23, odd01, c[3])
	return c
}
