// Command asm writes the assembly of package lanes: for each vector width the
// same passes; vector.go there says what they do.
//
//	go run . -out ../passes_amd64.s -stubs ../passes_amd64.go -pkg lanes
package main

import (
	. "github.com/mmcloughlin/avo/build"
	. "github.com/mmcloughlin/avo/operand"
	"github.com/mmcloughlin/avo/reg"
)

func main() {
	ConstraintExpr("amd64,!purego")
	for _, k := range []kernel{
		{"AVX2", 32, YMM},
		{"AVX512", 64, ZMM},
	} {
		k.load4()
		k.store4()
		k.split2()
		k.join2()
		k.split4()
		k.join4()
	}
	leavesOf4()
	leavesOf8()
	Generate()
}

// kernel is a vector width: width bytes, a register from vector.
type kernel struct {
	name   string
	width  int
	vector func() reg.VecVirtual
}

// element is the size of an element in bytes: a vector of real parts and one
// of imaginary parts of neighbouring points.
func (k kernel) element() int { return 2 * k.width }

// point is an element in registers.
type point struct{ re, im reg.VecVirtual }

func (k kernel) point() point { return point{k.vector(), k.vector()} }

func (k kernel) load(m Mem) point {
	p := k.point()
	VMOVUPD(m, p.re)
	VMOVUPD(m.Offset(k.width), p.im)
	return p
}

func (k kernel) store(p point, m Mem) {
	VMOVUPD(p.re, m)
	VMOVUPD(p.im, m.Offset(k.width))
}

// broadcast loads the complex number at m into every lane.
func (k kernel) broadcast(m Mem) point {
	p := k.point()
	VBROADCASTSD(m, p.re)
	VBROADCASTSD(m.Offset(8), p.im)
	return p
}

// times returns a w.
func (k kernel) times(a, w point) point {
	p := k.point()
	VMULPD(a.im, w.im, p.re)
	VMULPD(a.re, w.im, p.im)
	VFMSUB231PD(a.re, w.re, p.re)
	VFMADD231PD(a.im, w.re, p.im)
	return p
}

// timesConj returns a times the conjugate of w.
func (k kernel) timesConj(a, w point) point {
	p := k.point()
	VMULPD(a.im, w.im, p.re)
	VMULPD(a.re, w.im, p.im)
	VFMADD231PD(a.re, w.re, p.re)
	VFMSUB231PD(a.im, w.re, p.im)
	return p
}

// timesConjTurned returns j a times the conjugate of w.
func (k kernel) timesConjTurned(a, w point) point {
	p := k.point()
	VMULPD(a.im, w.re, p.re)
	VMULPD(a.im, w.im, p.im)
	VFMSUB231PD(a.re, w.im, p.re)
	VFMADD231PD(a.re, w.re, p.im)
	return p
}

// sumDiff returns a+b and a-b.
func (k kernel) sumDiff(a, b point) (s, d point) {
	s, d = k.point(), k.point()
	VADDPD(b.re, a.re, s.re)
	VADDPD(b.im, a.im, s.im)
	VSUBPD(b.re, a.re, d.re)
	VSUBPD(b.im, a.im, d.im)
	return s, d
}

// turn returns a-jb and a+jb.
func (k kernel) turn(a, b point) (minus, plus point) {
	minus, plus = k.point(), k.point()
	VADDPD(b.im, a.re, minus.re)
	VSUBPD(b.re, a.im, minus.im)
	VSUBPD(b.im, a.re, plus.re)
	VADDPD(b.re, a.im, plus.im)
	return minus, plus
}
