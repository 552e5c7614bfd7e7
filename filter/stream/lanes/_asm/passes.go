package main

import (
	"fmt"
	"math/bits"

	. "github.com/mmcloughlin/avo/build"
	. "github.com/mmcloughlin/avo/operand"
	"github.com/mmcloughlin/avo/reg"
)

// factorSize is the size of a twiddle in bytes.
const factorSize = 48

// blocks writes a function that loops over blocks of radix rows and in each
// over the places of the first n elements. enter loads a block's factors, body
// does a butterfly on the rows.
func (k kernel) blocks(name string, radix int, enter func(w Mem), body func(rows []Mem)) {
	TEXT(name+k.name, NOSPLIT, "func(x *float64, step, n, count int, w *complex128)")
	Pragma("noescape")
	x := Load(Param("x"), GP64())
	step := Load(Param("step"), GP64())
	n := Load(Param("n"), GP64())
	count := Load(Param("count"), GP64())
	w := Load(Param("w"), GP64())
	Comment("step in bytes, and three times that")
	SHLQ(Imm(uint64(bits.TrailingZeros(uint(k.element())))), step)
	step3 := GP64()
	LEAQ(Mem{Base: step, Index: step, Scale: 2}, step3)

	Label("block")
	enter(Mem{Base: w})
	at, left := GP64(), GP64()
	MOVQ(x, at)
	MOVQ(n, left)
	Label("butterfly")
	body(rows(at, step, step3)[:radix])
	ADDQ(U32(k.element()), at)
	DECQ(left)
	JNZ(LabelRef("butterfly"))
	LEAQ(Mem{Base: x, Index: step, Scale: uint8(radix)}, x)
	ADDQ(Imm(factorSize), w)
	DECQ(count)
	JNZ(LabelRef("block"))
	VZEROUPPER()
	RET()
}

func rows(at, step, step3 reg.Register) []Mem {
	return []Mem{
		{Base: at},
		{Base: at, Index: step, Scale: 1},
		{Base: at, Index: step, Scale: 2},
		{Base: at, Index: step3, Scale: 1},
	}
}

func (k kernel) split2() {
	var w2 point
	k.blocks("split2", 2,
		func(w Mem) { w2 = k.broadcast(w.Offset(16)) },
		func(rows []Mem) {
			s, d := k.sumDiff(k.load(rows[0]), k.times(k.load(rows[1]), w2))
			k.store(s, rows[0])
			k.store(d, rows[1])
		})
}

func (k kernel) join2() {
	var w2 point
	k.blocks("join2", 2,
		func(w Mem) { w2 = k.broadcast(w.Offset(16)) },
		func(rows []Mem) {
			s, d := k.sumDiff(k.load(rows[0]), k.load(rows[1]))
			k.store(s, rows[0])
			k.store(k.timesConj(d, w2), rows[1])
		})
}

func (k kernel) split4() {
	var w [3]point
	k.blocks("split4", 4,
		func(m Mem) { w = k.factors(m) },
		func(rows []Mem) { k.storeAll(k.split(k.loadAll(rows), w), rows) })
}

func (k kernel) join4() {
	var w [3]point
	k.blocks("join4", 4,
		func(m Mem) { w = k.factors(m) },
		func(rows []Mem) {
			p := k.join(k.loadAll(rows))
			k.store(p[0], rows[0])
			for i, f := range w {
				k.store(k.timesConj(p[i+1], f), rows[i+1])
			}
		})
}

func (k kernel) factors(w Mem) [3]point {
	return [3]point{k.broadcast(w), k.broadcast(w.Offset(16)), k.broadcast(w.Offset(32))}
}

func (k kernel) loadAll(rows []Mem) [4]point {
	return [4]point{k.load(rows[0]), k.load(rows[1]), k.load(rows[2]), k.load(rows[3])}
}

func (k kernel) storeAll(p [4]point, rows []Mem) {
	for i := range p {
		Comment(fmt.Sprintf("row %d", i))
		k.store(p[i], rows[i])
	}
}

// split evaluates p0 + w1 p1 z + w2 p2 z^2 + w3 p3 z^3 at z = 1, -1, -j, j.
func (k kernel) split(p [4]point, w [3]point) [4]point {
	for i, f := range w {
		p[i+1] = k.times(p[i+1], f)
	}
	return k.evaluate(p)
}

// evaluate is split without factors.
func (k kernel) evaluate(p [4]point) [4]point {
	s, u := k.sumDiff(p[0], p[2])
	t, v := k.sumDiff(p[1], p[3])
	p[0], p[1] = k.sumDiff(s, t)
	p[2], p[3] = k.turn(u, v)
	return p
}

// join undoes evaluate, but for a factor of four.
func (k kernel) join(p [4]point) [4]point {
	s, u := k.sumDiff(p[0], p[1])
	t, v := k.sumDiff(p[2], p[3])
	p[0], p[2] = k.sumDiff(s, t)
	p[3], p[1] = k.turn(u, v)
	return p
}
