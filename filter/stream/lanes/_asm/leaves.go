package main

import (
	. "github.com/mmcloughlin/avo/build"
	. "github.com/mmcloughlin/avo/operand"
	"github.com/mmcloughlin/avo/reg"
)

// leaves writes a function that takes as many elements at a time as a vector has
// lanes, each a block of its own, and turns them so that lane l of vector j is
// point j of block l. Then body convolves all these blocks at once, with factors
// and a spectrum that next reads vector by vector from a table.
func (k kernel) leaves(name string, lanes int, transpose func([]reg.VecVirtual) []reg.VecVirtual, body func(p []point, next func() point) []point) {
	TEXT(name, NOSPLIT, "func(x *float64, groups int, table *float64)")
	Pragma("noescape")
	x := Load(Param("x"), GP64())
	groups := Load(Param("groups"), GP64())
	table := Load(Param("table"), GP64())

	Label("group")
	re, im := make([]reg.VecVirtual, lanes), make([]reg.VecVirtual, lanes)
	for i := range lanes {
		p := k.load(Mem{Base: x, Disp: i * k.element()})
		re[i], im[i] = p.re, p.im
	}
	re, im = transpose(re), transpose(im)
	p := make([]point, lanes)
	for i := range p {
		p[i] = point{re[i], im[i]}
	}
	read := 0
	p = body(p, func() point {
		w := k.load(Mem{Base: table, Disp: read})
		read += k.element()
		return w
	})
	for i, q := range p {
		re[i], im[i] = q.re, q.im
	}
	re, im = transpose(re), transpose(im)
	for i := range lanes {
		k.store(point{re[i], im[i]}, Mem{Base: x, Disp: i * k.element()})
	}
	ADDQ(U32(lanes*k.element()), x)
	ADDQ(U32(read), table)
	DECQ(groups)
	JNZ(LabelRef("group"))
	VZEROUPPER()
	RET()
}

// leavesOf4 convolves blocks of four points with AVX2.
func leavesOf4() {
	k := kernel{"AVX2", 32, YMM}
	k.leaves("leavesAVX2", 4, transpose4, func(p []point, next func() point) []point {
		q := [4]point(p)
		var w [3]point
		for i := range w {
			w[i] = next()
			q[i+1] = k.times(q[i+1], w[i])
		}
		q = k.evaluate(q)
		for i := range q {
			q[i] = k.times(q[i], next())
		}
		q = k.join(q)
		for i := range w {
			q[i+1] = k.timesConj(q[i+1], w[i])
		}
		return q[:]
	})
}

// leavesOf8 convolves blocks of eight points with AVX-512: a radix-4 pass and a
// radix-2 pass each way. The factors of the four inner blocks are v, -jv, u, -ju.
func leavesOf8() {
	k := kernel{"AVX512", 64, ZMM}
	k.leaves("leavesAVX512", 8, transpose8, func(p []point, next func() point) []point {
		w := [3]point{next(), next(), next()}
		for i := range 2 {
			q := k.split([4]point{p[i], p[i+2], p[i+4], p[i+6]}, w)
			p[i], p[i+2], p[i+4], p[i+6] = q[0], q[1], q[2], q[3]
		}
		for i := 0; i < 8; i += 4 {
			v := next()
			p[i], p[i+1] = k.sumDiff(p[i], k.times(p[i+1], v))
			p[i+2], p[i+3] = k.turn(p[i+2], k.times(p[i+3], v))
			for j := i; j < i+4; j++ {
				p[j] = k.times(p[j], next())
			}
			s, d := k.sumDiff(p[i], p[i+1])
			p[i], p[i+1] = s, k.timesConj(d, v)
			s, d = k.sumDiff(p[i+2], p[i+3])
			p[i+2], p[i+3] = s, k.timesConjTurned(d, v)
		}
		for i := range 2 {
			q := k.join([4]point{p[i], p[i+2], p[i+4], p[i+6]})
			p[i] = q[0]
			for r, f := range w {
				p[i+2*r+2] = k.timesConj(q[r+1], f)
			}
		}
		return p
	})
}

// transpose4 turns four rows of four values into columns.
func transpose4(r []reg.VecVirtual) []reg.VecVirtual {
	low01, high01 := unpack(YMM, r[0], r[1])
	low23, high23 := unpack(YMM, r[2], r[3])
	c := []reg.VecVirtual{YMM(), YMM(), YMM(), YMM()}
	VPERM2F128(Imm(0x20), low23, low01, c[0])
	VPERM2F128(Imm(0x20), high23, high01, c[1])
	VPERM2F128(Imm(0x31), low23, low01, c[2])
	VPERM2F128(Imm(0x31), high23, high01, c[3])
	return c
}

// transpose8 turns eight rows of eight values into columns: first within pairs of
// values, then pairs as a whole, four by four.
func transpose8(r []reg.VecVirtual) []reg.VecVirtual {
	c := make([]reg.VecVirtual, 8)
	var low, high [4]reg.VecVirtual
	for i := range low {
		low[i], high[i] = unpack(ZMM, r[2*i], r[2*i+1])
	}
	c[0], c[2], c[4], c[6] = transposePairs(low)
	c[1], c[3], c[5], c[7] = transposePairs(high)
	return c
}

func transposePairs(r [4]reg.VecVirtual) (c0, c1, c2, c3 reg.VecVirtual) {
	even01, odd01 := evenOdd(r[0], r[1])
	even23, odd23 := evenOdd(r[2], r[3])
	c0, c2 = evenOdd(even01, even23)
	c1, c3 = evenOdd(odd01, odd23)
	return c0, c1, c2, c3
}

// evenOdd takes the pairs of values at even and at odd places from a, then b.
func evenOdd(a, b reg.VecVirtual) (even, odd reg.VecVirtual) {
	even, odd = ZMM(), ZMM()
	VSHUFF64X2(Imm(0x88), b, a, even)
	VSHUFF64X2(Imm(0xdd), b, a, odd)
	return even, odd
}

// unpack interleaves the values of a and b at even and at odd places.
func unpack(vector func() reg.VecVirtual, a, b reg.VecVirtual) (low, high reg.VecVirtual) {
	low, high = vector(), vector()
	VUNPCKLPD(b, a, low)
	VUNPCKHPD(b, a, high)
	return low, high
}
