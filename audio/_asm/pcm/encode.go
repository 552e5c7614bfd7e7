package main

import (
	"math"

	. "github.com/mmcloughlin/avo/build"
	. "github.com/mmcloughlin/avo/operand"
	"github.com/mmcloughlin/avo/reg"
)

// Predicates of comparisons: true if the operands are in no order, too.
const (
	notLessOrEqual = 0x16
	notLess        = 0x15
)

// encoders writes a function for each container.
func encoders() {
	pcmEncoder("encode8", 1, func() func(reg.VecVirtual, Mem) {
		silence := broadcast(0x8080_8080_8080_8080)
		return func(codes reg.VecVirtual, dst Mem) {
			words := packWords(codes)
			VPACKSSWB(words, words, words)
			VPXOR(silence.AsX(), words, words)
			VMOVQ(words, dst)
		}
	})
	pcmEncoder("encode16", 2, func() func(reg.VecVirtual, Mem) {
		return func(codes reg.VecVirtual, dst Mem) { VMOVDQU(packWords(codes), dst) }
	})
	pcmEncoder("encode24", 3, func() func(reg.VecVirtual, Mem) {
		low := gather24()
		return func(codes reg.VecVirtual, dst Mem) {
			VPSHUFB(low, codes, codes)
			VMOVDQU(codes.AsX(), dst)
			VEXTRACTI128(Imm(1), codes, codes.AsX())
			VMOVDQU(codes.AsX(), dst.Offset(12))
		}
	})
	pcmEncoder("encode32", 4, func() func(reg.VecVirtual, Mem) {
		return func(codes reg.VecVirtual, dst Mem) { VMOVDQU(codes, dst) }
	})
	encodeFloat32()
	encodeFloat64()
}

// packWords makes eight codes that fit 16 bits so long; it spoils them.
func packWords(codes reg.VecVirtual) reg.VecVirtual {
	words := XMM()
	VEXTRACTI128(Imm(1), codes, words)
	VPACKSSDW(words, codes.AsX(), words)
	return words
}

// pcmEncoder writes a function that rounds samples until it meets a loud one;
// prepare loads constants and returns what stores eight codes.
func pcmEncoder(name string, bytes int, prepare func() func(codes reg.VecVirtual, dst Mem)) {
	TEXT(name+"AVX2", NOSPLIT, "func(dst *byte, src *float64, noise *float64, n int, scale float64, safe float64, shift uint64) int")
	Pragma("noescape")
	dst, src, left := encoderParams()
	noise := Load(Param("noise"), GP64())
	scale, safe, magnitude := broadcastParam("scale"), broadcastParam("safe"), broadcast(1<<63-1)
	shift := XMM()
	VMOVQ(param("shift"), shift)
	store := prepare()
	Label("samples")
	y, loud := [2]reg.VecVirtual{YMM(), YMM()}, [2]reg.VecVirtual{YMM(), YMM()}
	for i := range y {
		VMULPD(Mem{Base: src, Disp: 32 * i}, scale, y[i])
		VANDPD(magnitude, y[i], loud[i])
		VCMPPD(Imm(notLessOrEqual), safe, loud[i], loud[i])
	}
	stopIfAny(loud)
	codes, high := YMM(), XMM()
	for i := range y {
		VADDPD(Mem{Base: noise, Disp: 32 * i}, y[i], y[i])
	}
	VCVTPD2DQY(y[0], codes.AsX())
	VCVTPD2DQY(y[1], high)
	VINSERTI128(Imm(1), high, codes, codes)
	VPSLLD(shift, codes, codes)
	store(codes, Mem{Base: dst})
	ADDQ(Imm(8*group), noise)
	ADDQ(Imm(uint64(group*bytes)), dst)
	encoderNext(src, left)
}

// encodeFloat32 writes a function that rounds to 32-bit float until it meets a
// sample that does not fit.
func encodeFloat32() {
	TEXT("encodeFloat32AVX2", NOSPLIT, "func(dst *byte, src *float64, n int) int")
	Pragma("noescape")
	dst, src, left := encoderParams()
	magnitude, infinite := broadcast(0x7fffffff_7fffffff), broadcast(0x7f800000_7f800000)
	Label("samples")
	floats, high, bad := YMM(), XMM(), YMM()
	VCVTPD2PSY(Mem{Base: src}, floats.AsX())
	VCVTPD2PSY(Mem{Base: src, Disp: 32}, high)
	VINSERTF128(Imm(1), high, floats, floats)
	VANDPS(magnitude, floats, bad)
	VCMPPS(Imm(notLess), infinite, bad, bad)
	VPTEST(bad, bad)
	JNZ(LabelRef("stop"))
	VMOVUPS(floats, Mem{Base: dst})
	ADDQ(Imm(4*group), dst)
	encoderNext(src, left)
}

// encodeFloat64 writes a function that copies until it meets a sample that is not
// finite, and finite one that only looks.
func encodeFloat64() {
	TEXT("encodeFloat64AVX2", NOSPLIT, "func(dst *byte, src *float64, n int) int")
	Pragma("noescape")
	dst, src, left := encoderParams()
	check := finiteCheck()
	Label("samples")
	for i, v := range check(src) {
		VMOVUPD(v, Mem{Base: dst, Disp: 32 * i})
	}
	ADDQ(Imm(8*group), dst)
	encoderNext(src, left)

	TEXT("finiteAVX2", NOSPLIT, "func(src *float64, n int) int")
	Pragma("noescape")
	src, left = Load(Param("src"), GP64()), Load(Param("n"), GP64())
	check = finiteCheck()
	Label("samples")
	check(src)
	encoderNext(src, left)
}

// finiteCheck loads constants and returns what loads a group and stops unless it
// is finite.
func finiteCheck() func(src reg.Register) [2]reg.VecVirtual {
	magnitude, infinite := broadcast(1<<63-1), broadcastFloat(math.Inf(1))
	return func(src reg.Register) [2]reg.VecVirtual {
		x, bad := [2]reg.VecVirtual{YMM(), YMM()}, [2]reg.VecVirtual{YMM(), YMM()}
		for i := range x {
			VMOVUPD(Mem{Base: src, Disp: 32 * i}, x[i])
			VANDPD(magnitude, x[i], bad[i])
			VCMPPD(Imm(notLess), infinite, bad[i], bad[i])
		}
		stopIfAny(bad)
		return x
	}
}

// stopIfAny leaves the loop if any bit of two registers is set; it spoils one.
func stopIfAny(bits [2]reg.VecVirtual) {
	VORPD(bits[0], bits[1], bits[0])
	VPTEST(bits[0], bits[0])
	JNZ(LabelRef("stop"))
}

func encoderParams() (dst, src, left reg.Register) {
	dst = Load(Param("dst"), GP64())
	src = Load(Param("src"), GP64())
	left = Load(Param("n"), GP64())
	return dst, src, left
}

// encoderNext ends the loop and returns how many samples were done.
func encoderNext(src, left reg.Register) {
	ADDQ(Imm(8*group), src)
	SUBQ(Imm(group), left)
	JNZ(LabelRef("samples"))
	Label("stop")
	done := Load(Param("n"), GP64())
	SUBQ(left, done)
	Store(done, ReturnIndex(0))
	VZEROUPPER()
	RET()
}
