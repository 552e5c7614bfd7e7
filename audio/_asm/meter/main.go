// Command meter writes the assembly of package audio: for each vector width the
// two functions that the true-peak meter spends its time in, see kernels.go there
// for what they do.
//
//	go run ./meter -out ../kernels_amd64.s -stubs ../kernels_amd64.go -pkg audio
package main

import (
	. "github.com/mmcloughlin/avo/build"
	. "github.com/mmcloughlin/avo/operand"
	"github.com/mmcloughlin/avo/reg"
)

func main() {
	ConstraintExpr("amd64,!purego")
	for _, k := range []kernel{{"AVX2", 32, YMM}, {"AVX512", 64, ZMM}} {
		k.extremes()
		k.points()
	}
	Generate()
}

// group is how many samples, or windows, are looked at together: one register with
// AVX-512, two with AVX2.
const group = 8

// kernel is a vector width: width bytes, a register from vector.
type kernel struct {
	name   string
	width  int
	vector func() reg.VecVirtual
}

func (k kernel) wide() bool { return k.width == 64 }

// parts are the registers of a group.
type parts []reg.VecVirtual

func (k kernel) parts() parts {
	p := make(parts, group*8/k.width)
	for i := range p {
		p[i] = k.vector()
	}
	return p
}

func (k kernel) load(m Mem) parts {
	p := k.parts()
	for i := range p {
		VMOVUPD(m.Offset(k.width*i), p[i])
	}
	return p
}

// magnitude clears signs.
func (k kernel) magnitude(p parts, mask reg.VecVirtual) {
	for _, v := range p {
		if k.wide() {
			VPANDQ(mask, v, v)
		} else {
			VANDPD(mask, v, v)
		}
	}
}

// mask has every bit set but the signs.
func (k kernel) mask() reg.VecVirtual {
	word, v := GP64(), k.vector()
	MOVQ(U64(1<<63-1), word)
	if k.wide() {
		VPBROADCASTQ(word, v)
	} else {
		VMOVQ(word, v.AsX())
		VPBROADCASTQ(v.AsX(), v)
	}
	return v
}

// horizontal leaves the largest lane of v in all of them.
func (k kernel) horizontal(v reg.VecVirtual) {
	other := k.vector()
	if k.wide() {
		VSHUFF64X2(Imm(0b01_00_11_10), v, v, other)
		VMAXPD(other, v, v)
		VSHUFF64X2(Imm(0b10_11_00_01), v, v, other)
	} else {
		VPERM2F128(Imm(1), v, v, other)
	}
	VMAXPD(other, v, v)
	VPERMILPD(Imm(0b01_01_01_01), v, other)
	VMAXPD(other, v, v)
}

func (k kernel) zero() reg.VecVirtual {
	v := k.vector()
	if k.wide() {
		VPXORQ(v, v, v)
	} else {
		VXORPD(v, v, v)
	}
	return v
}
