package main

import (
	. "github.com/mmcloughlin/avo/build"
	. "github.com/mmcloughlin/avo/operand"
	"github.com/mmcloughlin/avo/reg"
)

// exponent52 are the upper bits of a float64 from 2^52 on: the lower ones then
// count in steps of 1.
const exponent52 = 0x4330_0000_0000_0000

const drawSignature = "func(dst *float64, state *[4][8]uint64, steps int)"

// drawAVX2 takes the eight lanes as two halves.
func drawAVX2() {
	TEXT("drawAVX2", NOSPLIT, drawSignature)
	Pragma("noescape")
	dst, state, steps := drawParams()
	magic, unit := broadcast(exponent52), broadcastFloat(0x1p-32)
	var s [2][4]reg.VecVirtual
	for half := range s {
		for k := range s[half] {
			s[half][k] = YMM()
			VMOVDQU(Mem{Base: state, Disp: 64*k + 32*half}, s[half][k])
		}
	}
	Label("steps")
	for half := range s {
		v := triangularAVX2(nextAVX2(s[half]), magic, unit)
		VMOVUPD(v, Mem{Base: dst, Disp: 32 * half})
	}
	ADDQ(Imm(64), dst)
	DECQ(steps)
	JNZ(LabelRef("steps"))
	for half := range s {
		for k := range s[half] {
			VMOVDQU(s[half][k], Mem{Base: state, Disp: 64*k + 32*half})
		}
	}
	VZEROUPPER()
	RET()
}

func drawParams() (dst, state, steps reg.Register) {
	dst = Load(Param("dst"), GP64())
	state = Load(Param("state"), GP64())
	steps = Load(Param("steps"), GP64())
	return dst, state, steps
}

// nextAVX2 is one step of xoshiro256++ in four lanes.
func nextAVX2(s [4]reg.VecVirtual) reg.VecVirtual {
	out, t := YMM(), YMM()
	VPADDQ(s[3], s[0], out)
	rotateAVX2(out, 23)
	VPADDQ(s[0], out, out)
	VPSLLQ(Imm(17), s[1], t)
	VPXOR(s[0], s[2], s[2])
	VPXOR(s[1], s[3], s[3])
	VPXOR(s[2], s[1], s[1])
	VPXOR(s[3], s[0], s[0])
	VPXOR(t, s[2], s[2])
	rotateAVX2(s[3], 45)
	return out
}

func rotateAVX2(v reg.VecVirtual, left uint64) {
	low := YMM()
	VPSRLQ(Imm(64-left), v, low)
	VPSLLQ(Imm(left), v, v)
	VPOR(low, v, v)
}

// triangularAVX2 is the upper half of u minus its lower half, times unit; it spoils
// u. Both halves become numbers by standing in the lower bits of one from 2^52
// on; the difference is exact.
func triangularAVX2(u, magic, unit reg.VecVirtual) reg.VecVirtual {
	lower := YMM()
	VPBLENDD(Imm(0b10101010), magic, u, lower)
	VPSRLQ(Imm(32), u, u)
	VPOR(magic, u, u)
	VSUBPD(lower, u, u)
	VMULPD(unit, u, u)
	return u
}

// Truth tables of VPTERNLOGQ, bit 4a+2b+c.
const (
	xor3 = 0b10010110 // a ^ b ^ c
	pick = 0b11100100 // c ? a : b
)

// drawAVX512 has all lanes in one register.
func drawAVX512() {
	TEXT("drawAVX512", NOSPLIT, drawSignature)
	Pragma("noescape")
	dst, state, steps := drawParams()
	magic, unit, low := broadcastWide(exponent52), broadcastWide(0x3df0_0000_0000_0000), broadcastWide(1<<32-1)
	var s [4]reg.VecVirtual
	for k := range s {
		s[k] = ZMM()
		VMOVDQU64(Mem{Base: state, Disp: 64 * k}, s[k])
	}
	Label("steps")
	out, t, old1 := ZMM(), ZMM(), ZMM()
	VPADDQ(s[3], s[0], out)
	VPROLQ(Imm(23), out, out)
	VPADDQ(s[0], out, out)
	VPSLLQ(Imm(17), s[1], t)
	VMOVDQA64(s[1], old1)
	VPTERNLOGQ(Imm(xor3), s[2], s[0], s[1])
	VPTERNLOGQ(Imm(xor3), s[0], t, s[2])
	VPXORQ(old1, s[3], s[3])
	VPXORQ(s[3], s[0], s[0])
	VPROLQ(Imm(45), s[3], s[3])
	lower := ZMM()
	VMOVDQA64(out, lower)
	VPTERNLOGQ(Imm(pick), low, magic, lower)
	VPSRLQ(Imm(32), out, out)
	VPORQ(magic, out, out)
	VSUBPD(lower, out, out)
	VMULPD(unit, out, out)
	VMOVUPD(out, Mem{Base: dst})
	ADDQ(Imm(64), dst)
	DECQ(steps)
	JNZ(LabelRef("steps"))
	for k := range s {
		VMOVDQU64(s[k], Mem{Base: state, Disp: 64 * k})
	}
	VZEROUPPER()
	RET()
}

func broadcastWide(bits uint64) reg.VecVirtual {
	word, v := GP64(), ZMM()
	MOVQ(U64(bits), word)
	VPBROADCASTQ(word, v)
	return v
}

// pairs writes the function that interleaves two signals.
func pairs() {
	TEXT("pairsAVX2", NOSPLIT, "func(dst *float64, left *float64, right *float64, n int)")
	Pragma("noescape")
	dst := Load(Param("dst"), GP64())
	left := Load(Param("left"), GP64())
	right := Load(Param("right"), GP64())
	n := Load(Param("n"), GP64())
	Label("samples")
	for half := range 2 {
		l, r, low, high := YMM(), YMM(), YMM(), YMM()
		VPERMPD(Imm(0b11_01_10_00), Mem{Base: left, Disp: 32 * half}, l)
		VPERMPD(Imm(0b11_01_10_00), Mem{Base: right, Disp: 32 * half}, r)
		VUNPCKLPD(r, l, low)
		VUNPCKHPD(r, l, high)
		VMOVUPD(low, Mem{Base: dst, Disp: 64 * half})
		VMOVUPD(high, Mem{Base: dst, Disp: 64*half + 32})
	}
	ADDQ(Imm(128), dst)
	ADDQ(Imm(64), left)
	ADDQ(Imm(64), right)
	SUBQ(Imm(group), n)
	JNZ(LabelRef("samples"))
	VZEROUPPER()
	RET()
}

// unpairs writes the function that undoes pairs.
func unpairs() {
	TEXT("unpairsAVX2", NOSPLIT, "func(left *float64, right *float64, src *float64, n int)")
	Pragma("noescape")
	left := Load(Param("left"), GP64())
	right := Load(Param("right"), GP64())
	src := Load(Param("src"), GP64())
	n := Load(Param("n"), GP64())
	Label("samples")
	for half := range 2 {
		low, high, l, r := YMM(), YMM(), YMM(), YMM()
		VMOVUPD(Mem{Base: src, Disp: 64 * half}, low)
		VMOVUPD(Mem{Base: src, Disp: 64*half + 32}, high)
		VUNPCKLPD(high, low, l)
		VUNPCKHPD(high, low, r)
		VPERMPD(Imm(0b11_01_10_00), l, l)
		VPERMPD(Imm(0b11_01_10_00), r, r)
		VMOVUPD(l, Mem{Base: left, Disp: 32 * half})
		VMOVUPD(r, Mem{Base: right, Disp: 32 * half})
	}
	ADDQ(Imm(128), src)
	ADDQ(Imm(64), left)
	ADDQ(Imm(64), right)
	SUBQ(Imm(group), n)
	JNZ(LabelRef("samples"))
	VZEROUPPER()
	RET()
}
