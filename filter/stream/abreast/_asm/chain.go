package main

import (
	"fmt"

	. "github.com/mmcloughlin/avo/build"
	. "github.com/mmcloughlin/avo/operand"
	"github.com/mmcloughlin/avo/reg"
)

// skew is by how many steps a section trails the one before it. From one
// sample's output to what it changes in the next section's feedback there are a
// shift and four multiplications in a row, 27 cycles where one takes 4 or 5;
// they are spread over skew+1 steps and so wait for nothing that the feedback
// itself does not wait for. 2 instead of 4 takes half as long again.
const skew = 4

// period is Period of package abreast, so many samples from one time at which
// quiet states are set to zero to the next.
const period = 512

// chain is an arrangement of lanes: so many vectors for so many channels, the
// channels of a section beside each other, the last section lowest.
type chain struct {
	vector
	vectors, channels int
}

func (c chain) lanes() int    { return c.vectors * c.width }
func (c chain) sections() int { return c.lanes() / c.channels }

// fill is how many steps pass before the last section has its first sample.
func (c chain) fill() int { return skew * (c.sections() - 1) }

// The rows of a table; a row has a number for each lane.
const (
	rowB0 = iota
	rowC1
	rowC2
	rowA1
	rowA2
	rowStart
	rowR
	rowQ
	rowE
)

func (f *function) row(row, vector int) Mem {
	return Mem{Base: f.table, Disp: 8 * (row*f.lanes() + vector*f.width)}
}

// state is what the lanes of a vector remember: r, q, e, and what they put out
// in the last skew steps, oldest first.
type state struct {
	r, q, e reg.VecVirtual
	y       [skew]reg.VecVirtual
}

// after says which register is which so many steps later.
func (s state) after(steps int) state {
	if steps%2 == 1 {
		s.r, s.q = s.q, s.r
	}
	turned := s
	for i := range s.y {
		turned.y[i] = s.y[(i+steps)%skew]
	}
	return turned
}

// function is a chain being written.
type function struct {
	chain
	table     reg.GPVirtual
	src, dst  []reg.GPVirtual // of each channel
	t, n, end reg.GPVirtual   // the step, the samples, the steps in all
	flush     reg.GPVirtual   // the step before which to set quiet states to zero
	states    []state
	held      Mem // a vector out of the way
}

func (c chain) write() {
	TEXT(fmt.Sprintf("chain%dx%d%s", c.sections(), c.channels, c.name), NOSPLIT, "func(dst, src **float64, n, flush int, table *float64)")
	Pragma("noescape")
	f := &function{chain: c}
	f.load()

	Label("step")
	CMPQ(f.t, f.flush)
	JNE(LabelRef("loud"))
	f.quieten()
	ADDQ(U32(period), f.flush)
	Label("loud")
	CMPQ(f.t, U32(c.fill()))
	JL(LabelRef("partial"))

	Comment("whole steps, skew at a time, to the last sample or the next flush")
	to := GP64()
	MOVQ(f.n, to)
	CMPQ(f.flush, to)
	CMOVQLT(f.flush, to)
	SUBQ(U32(skew), to)
	CMPQ(f.t, to)
	JG(LabelRef("partial"))
	Label("whole")
	for i := range skew {
		f.step(i)
	}
	ADDQ(U32(skew), f.t)
	CMPQ(f.t, to)
	JLE(LabelRef("whole"))
	JMP(LabelRef("step"))

	Label("partial")
	CMPQ(f.t, f.end)
	JGE(LabelRef("done"))
	f.partial()
	INCQ(f.t)
	JMP(LabelRef("step"))

	Label("done")
	f.save()
	VZEROUPPER()
	RET()
}

func (f *function) load() {
	f.table, f.n, f.flush = GP64(), GP64(), GP64()
	Load(Param("table"), f.table)
	Load(Param("n"), f.n)
	Load(Param("flush"), f.flush)
	f.src, f.dst = f.pointers("src"), f.pointers("dst")
	f.t, f.end = GP64(), GP64()
	XORQ(f.t, f.t)
	LEAQ(Mem{Base: f.n, Disp: f.fill()}, f.end)
	f.held = AllocLocal(8 * f.width)
	for v := range f.vectors {
		s := state{r: f.register(), q: f.register(), e: f.register()}
		VMOVUPD(f.row(rowR, v), s.r)
		VMOVUPD(f.row(rowQ, v), s.q)
		VMOVUPD(f.row(rowE, v), s.e)
		for i := range s.y {
			s.y[i] = f.register()
			f.zero(s.y[i])
		}
		f.states = append(f.states, s)
	}
}

func (f *function) pointers(name string) []reg.GPVirtual {
	at := Load(Param(name), GP64())
	p := make([]reg.GPVirtual, f.channels)
	for i := range p {
		p[i] = GP64()
		MOVQ(Mem{Base: at, Disp: 8 * i}, p[i])
	}
	return p
}

func (f *function) save() {
	for v, s := range f.states {
		VMOVUPD(s.r, f.row(rowR, v))
		VMOVUPD(s.q, f.row(rowQ, v))
		VMOVUPD(s.e, f.row(rowE, v))
	}
}

// step takes all lanes through the step t + ahead.
func (f *function) step(ahead int) {
	for v := range f.states {
		s := f.states[v].after(ahead)
		f.shift(s.y[0], f.above(v, ahead, f.t))
		x := s.y[0]
		VFMADD231PD(f.row(rowC1, v), x, s.e)
		VFNMADD132PD(f.row(rowA2, v), s.e, s.q)
		VMULPD(f.row(rowC2, v), x, s.e)
		VFNMADD231PD(f.row(rowA1, v), s.r, s.q)
		VFMADD132PD(f.row(rowB0, v), s.r, x)
	}
	f.output(ahead)
}

// above is what is shifted into vector v from above: the next vector, or
// samples from src.
func (f *function) above(v, ahead int, index reg.GPVirtual) reg.VecVirtual {
	if v+1 < f.vectors {
		return f.states[v+1].after(ahead).y[0]
	}
	in := f.register()
	f.zero(in) // or the generator takes its upper lanes for alive all the time
	for c, p := range f.src {
		m := Mem{Base: p, Index: index, Scale: 8, Disp: 8 * ahead}
		if c == 0 {
			VMOVSD(m, in.AsX())
		} else {
			VMOVHPD(m, in.AsX(), in.AsX())
		}
	}
	return in
}

// output stores what the last section has made of the sample fill steps ago.
func (f *function) output(ahead int) {
	y := f.states[0].after(ahead).y[0].AsX()
	for c, p := range f.dst {
		m := Mem{Base: p, Index: f.t, Scale: 8, Disp: 8 * (ahead - f.fill())}
		if c == 0 {
			VMOVSD(y, m)
		} else {
			VMOVHPD(y, m)
		}
	}
}

// partial takes those lanes through step t that have a sample. What the others
// put out goes to lanes that have none either.
func (f *function) partial() {
	Comment("after the end the last sample is as good as any")
	index := GP64()
	LEAQ(Mem{Base: f.n, Disp: -1}, index)
	CMPQ(f.t, index)
	CMOVQLT(f.t, index)
	for v, s := range f.states {
		f.shift(s.y[0], f.above(v, 0, index))
		x := s.y[0]
		active := f.active(v)
		e, r := f.register(), f.register()
		VMULPD(f.row(rowC2, v), x, e)
		VMOVUPD(e, f.held) // or there are too few registers
		VMOVAPD(s.e, r)
		VFMADD231PD(f.row(rowC1, v), x, r)
		VFNMADD231PD(f.row(rowA2, v), s.q, r)
		VFNMADD231PD(f.row(rowA1, v), s.r, r)
		VFMADD132PD(f.row(rowB0, v), s.r, x)
		active.blend(f.held, s.e)
		active.blend(s.r, s.q)
		active.blend(r, s.r)
	}
	CMPQ(f.t, U32(f.fill()))
	JL(LabelRef("unheard"))
	f.output(0)
	Label("unheard")
	for _, s := range f.states {
		y := f.register()
		VMOVAPD(s.y[0], y)
		for i := range skew - 1 {
			VMOVAPD(s.y[i+1], s.y[i])
		}
		VMOVAPD(y, s.y[skew-1])
	}
}

// quieten sets to zero what is quiet, in the lanes that have a sample at step t.
func (f *function) quieten() {
	for v, s := range f.states {
		active := f.active(v)
		for _, x := range []reg.VecVirtual{s.r, s.q, s.e} {
			active.quieten(x)
		}
	}
}
