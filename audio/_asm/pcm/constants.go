package main

import (
	"math"

	. "github.com/mmcloughlin/avo/build"
	. "github.com/mmcloughlin/avo/operand"
	"github.com/mmcloughlin/avo/reg"
)

// broadcast returns a register with bits in every quarter.
func broadcast(bits uint64) reg.VecVirtual {
	word, v := GP64(), YMM()
	MOVQ(U64(bits), word)
	VMOVQ(word, v.AsX())
	VPBROADCASTQ(v.AsX(), v)
	return v
}

func broadcastFloat(x float64) reg.VecVirtual { return broadcast(math.Float64bits(x)) }

// broadcastParam returns a register with a float64 parameter in every quarter.
func broadcastParam(name string) reg.VecVirtual {
	v := YMM()
	VBROADCASTSD(param(name), v)
	return v
}

func param(name string) Mem {
	c, err := Param(name).Resolve()
	if err != nil {
		panic(err)
	}
	return c.Addr
}

// dropped makes VPSHUFB write a 0.
const dropped = 0x80

// spread24 puts four samples of three bytes at the top of four bytes each, in
// both halves of a register; gather24 takes the low three of four bytes.
func spread24() reg.VecVirtual {
	return shuffle("spread24", [16]byte{
		dropped, 0, 1, 2, dropped, 3, 4, 5, dropped, 6, 7, 8, dropped, 9, 10, 11})
}

func gather24() reg.VecVirtual {
	return shuffle("gather24", [16]byte{
		0, 1, 2, 4, 5, 6, 8, 9, 10, 12, 13, 14, dropped, dropped, dropped, dropped})
}

func shuffle(name string, order [16]byte) reg.VecVirtual {
	v := YMM()
	VBROADCASTI128(ConstData(name, String(order[:])), v)
	return v
}
