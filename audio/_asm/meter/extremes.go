package main

import (
	. "github.com/mmcloughlin/avo/build"
	. "github.com/mmcloughlin/avo/operand"
)

// extremes writes the function that finds the largest sample and the largest
// second difference of each chunk.
func (k kernel) extremes() {
	TEXT("extremes"+k.name, NOSPLIT, "func(x *float64, stride int, samples int, chunks int, maxima *float64, bends *float64)")
	Pragma("noescape")
	x := Load(Param("x"), GP64())
	stride := Load(Param("stride"), GP64())
	samples := Load(Param("samples"), GP64())
	chunks := Load(Param("chunks"), GP64())
	maxima := Load(Param("maxima"), GP64())
	bends := Load(Param("bends"), GP64())
	Comment("the samples one and two frames before x")
	before1, before2 := GP64(), GP64()
	SHLQ(Imm(3), stride)
	MOVQ(x, before1)
	SUBQ(stride, before1)
	MOVQ(before1, before2)
	SUBQ(stride, before2)
	mask := k.mask()

	Label("chunk")
	peak, bend := k.parts(), k.parts()
	for i := range peak {
		peak[i], bend[i] = k.zero(), k.zero()
	}
	left := GP64()
	MOVQ(samples, left)
	Label("samples")
	now, last, bent := k.load(Mem{Base: x}), k.load(Mem{Base: before1}), k.load(Mem{Base: before2})
	for i := range now {
		VSUBPD(bent[i], last[i], bent[i])
		VSUBPD(last[i], now[i], last[i])
		VSUBPD(bent[i], last[i], bent[i])
	}
	k.magnitude(now, mask)
	k.magnitude(bent, mask)
	for i := range now {
		VMAXPD(now[i], peak[i], peak[i])
		VMAXPD(bent[i], bend[i], bend[i])
	}
	ADDQ(Imm(8*group), x)
	ADDQ(Imm(8*group), before1)
	ADDQ(Imm(8*group), before2)
	SUBQ(Imm(group), left)
	JNZ(LabelRef("samples"))
	for _, p := range []parts{peak, bend} {
		for _, v := range p[1:] {
			VMAXPD(v, p[0], p[0])
		}
		k.horizontal(p[0])
	}
	VMOVSD(peak[0].AsX(), Mem{Base: maxima})
	VMOVSD(bend[0].AsX(), Mem{Base: bends})
	ADDQ(Imm(8), maxima)
	ADDQ(Imm(8), bends)
	DECQ(chunks)
	JNZ(LabelRef("chunk"))
	VZEROUPPER()
	RET()
}
