package main

import (
	. "github.com/mmcloughlin/avo/build"
	. "github.com/mmcloughlin/avo/operand"
	"github.com/mmcloughlin/avo/reg"
)

// vector is a kind of register with so many lanes.
type vector struct {
	name     string
	width    int
	register func() reg.VecVirtual
}

var (
	xmm = vector{"AVX2", 2, XMM}
	ymm = vector{"AVX2", 4, YMM}
	zmm = vector{"AVX512", 8, ZMM}
)

// Vectors of one value.
var magnitude, quietest Mem

func defineConstants() {
	magnitude = constant("magnitude", U64(1<<63-1))
	quietest = constant("quietest", F64(1e-30))
}

func constant(name string, value Constant) Mem {
	m := GLOBL(name, RODATA|NOPTR)
	for i := range zmm.width {
		DATA(8*i, value)
	}
	return m
}

func (v vector) zero(r reg.VecVirtual) {
	if v.width == 8 {
		VPXORQ(r, r, r)
		return
	}
	VXORPD(r, r, r)
}

// broadcast sets all lanes to an integer.
func (v vector) broadcast(from reg.GPVirtual) reg.VecVirtual {
	r := v.register()
	v.zero(r)
	VCVTSI2SDQ(from, r.AsX(), r.AsX())
	if v.width == 2 {
		VMOVDDUP(r, r)
	} else {
		VBROADCASTSD(r.AsX(), r)
	}
	return r
}

// shift moves y down by the lanes of a section and lets the lowest lanes of above
// in at the top, which is spoilt if it is no vector of y's kind.
func (c chain) shift(y, above reg.VecVirtual) {
	switch {
	case c.width == 8:
		VALIGNQ(Imm(uint64(c.channels)), y, above, y)
	case c.width == c.channels:
		VMOVAPD(above, y)
	case c.width == 2:
		VSHUFPD(Imm(1), above, y, y)
	case c.channels == 2:
		VPERM2F128(Imm(0x21), above, y, y)
	default:
		middle := YMM()
		VPERM2F128(Imm(0x21), above, y, middle)
		VSHUFPD(Imm(5), middle, y, y)
	}
}

// mask says of each lane of a vector if it is active: in the sign of v with AVX2,
// in k with AVX-512.
type mask struct {
	vector
	v reg.VecVirtual
	k reg.Register
}

// active finds the lanes of vector v that have a sample at step t: sample
// t + start, from 0 to n-1.
func (f *function) active(v int) mask {
	sample := f.broadcast(f.t)
	VADDPD(f.row(rowStart, v), sample, sample)
	n := f.broadcast(f.n)
	if f.width == 8 {
		zero, begun, active := f.register(), K(), K()
		f.zero(zero)
		VCMPPD(Imm(lessOrEqual), sample, zero, begun)
		VCMPPD(Imm(less), n, sample, begun, active)
		return mask{vector: f.vector, k: active}
	}
	VSUBPD(n, sample, n)
	VANDNPD(n, sample, n)
	return mask{vector: f.vector, v: n}
}

// What VCMPPD compares: ordered, quiet.
const (
	less        = 0x11
	lessOrEqual = 0x12
)

// blend copies the active lanes.
func (m mask) blend(from Op, to reg.VecVirtual) {
	if m.width == 8 {
		VMOVUPD(from, m.k, to)
		return
	}
	VBLENDVPD(m.v, from, to, to)
}

// quieten sets active lanes to zero that are quieter than quietest.
func (m mask) quieten(x reg.VecVirtual) {
	loudness := m.register()
	if m.width == 8 {
		VPANDQ(magnitude, x, loudness)
		quiet := K()
		VCMPPD(Imm(less), quietest, loudness, m.k, quiet)
		VPXORQ(x, x, quiet, x)
		return
	}
	VANDPD(magnitude, x, loudness)
	VCMPPD(Imm(less), quietest, loudness, loudness)
	VANDNPD(x, loudness, loudness)
	VBLENDVPD(m.v, loudness, x, x)
}
