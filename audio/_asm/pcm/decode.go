package main

import (
	. "github.com/mmcloughlin/avo/build"
	. "github.com/mmcloughlin/avo/operand"
	"github.com/mmcloughlin/avo/reg"
)

// group is how many samples a loop takes at once.
const group = 8

// decoders writes a function for each container.
func decoders() {
	decoder("decode8", 1, func() func(Mem) [2]reg.VecVirtual {
		silence := broadcast(0x80_0000_0080)
		return scaled(0x1p-7, func(src Mem) [2]reg.VecVirtual {
			codes := YMM()
			VPMOVZXBD(src, codes)
			VPSUBD(silence, codes, codes)
			return halves(codes)
		})
	})
	decoder("decode16", 2, func() func(Mem) [2]reg.VecVirtual {
		return scaled(0x1p-15, func(src Mem) [2]reg.VecVirtual {
			codes := YMM()
			VPMOVSXWD(src, codes)
			return halves(codes)
		})
	})
	decoder("decode24", 3, func() func(Mem) [2]reg.VecVirtual {
		top := spread24()
		return scaled(0x1p-31, func(src Mem) [2]reg.VecVirtual {
			codes := YMM()
			VMOVDQU(src, codes.AsX())
			VINSERTI128(Imm(1), src.Offset(12), codes, codes)
			VPSHUFB(top, codes, codes)
			return halves(codes)
		})
	})
	decoder("decode32", 4, func() func(Mem) [2]reg.VecVirtual {
		return scaled(0x1p-31, func(src Mem) [2]reg.VecVirtual {
			v := [2]reg.VecVirtual{YMM(), YMM()}
			VCVTDQ2PD(src, v[0])
			VCVTDQ2PD(src.Offset(16), v[1])
			return v
		})
	})
	decoder("decodeFloat32", 4, func() func(Mem) [2]reg.VecVirtual {
		return func(src Mem) [2]reg.VecVirtual {
			v := [2]reg.VecVirtual{YMM(), YMM()}
			VCVTPS2PD(src, v[0])
			VCVTPS2PD(src.Offset(16), v[1])
			return v
		}
	})
	decoder("decodeFloat64", 8, func() func(Mem) [2]reg.VecVirtual {
		return func(src Mem) [2]reg.VecVirtual {
			v := [2]reg.VecVirtual{YMM(), YMM()}
			VMOVUPD(src, v[0])
			VMOVUPD(src.Offset(32), v[1])
			return v
		}
	})
}

// decoder writes a function that stores what the samples at src mean; prepare
// loads constants and returns what loads the samples.
func decoder(name string, bytes int, prepare func() func(Mem) [2]reg.VecVirtual) {
	TEXT(name+"AVX2", NOSPLIT, "func(dst *float64, src *byte, n int)")
	Pragma("noescape")
	dst := Load(Param("dst"), GP64())
	src := Load(Param("src"), GP64())
	n := Load(Param("n"), GP64())
	load := prepare()
	Label("samples")
	for i, v := range load(Mem{Base: src}) {
		VMOVUPD(v, Mem{Base: dst, Disp: 32 * i})
	}
	ADDQ(Imm(uint64(group*bytes)), src)
	ADDQ(Imm(8*group), dst)
	SUBQ(Imm(group), n)
	JNZ(LabelRef("samples"))
	VZEROUPPER()
	RET()
}

// scaled is load and a product with unit, a power of two.
func scaled(unit float64, load func(Mem) [2]reg.VecVirtual) func(Mem) [2]reg.VecVirtual {
	units := broadcastFloat(unit)
	return func(src Mem) [2]reg.VecVirtual {
		values := load(src)
		for _, v := range values {
			VMULPD(units, v, v)
		}
		return values
	}
}

// halves converts eight codes; it spoils them.
func halves(codes reg.VecVirtual) [2]reg.VecVirtual {
	v := [2]reg.VecVirtual{YMM(), YMM()}
	VCVTDQ2PD(codes.AsX(), v[0])
	VEXTRACTI128(Imm(1), codes, codes.AsX())
	VCVTDQ2PD(codes.AsX(), v[1])
	return v
}
