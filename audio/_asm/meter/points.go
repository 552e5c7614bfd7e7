package main

import (
	. "github.com/mmcloughlin/avo/build"
	. "github.com/mmcloughlin/avo/operand"
	"github.com/mmcloughlin/avo/reg"
)

const (
	taps      = 24 // of a window
	nearPairs = 3  // in the middle of a window
)

// Predicates of comparisons.
const (
	notLessOrEqual = 0x16 // or in no order
	greater        = 0x1e // and in order
)

// points writes the function that runs the interpolator on the windows of a chunk,
// where the near ones say that it may beat the peak.
func (k kernel) points() {
	TEXT("points"+k.name, NOSPLIT, "func(x *float64, stride int, windows int, h *float64, near *float64, middleSlack float64, sideSlack float64, peak float64) float64")
	Pragma("noescape")
	w := loadRows()
	left := Load(Param("windows"), GP64())
	h := k.coefficients("h", 3*taps/2, 12)
	near := k.coefficients("near", 3*nearPairs, 3*nearPairs)
	mask := k.mask()
	peak, middleLimit, sideLimit := k.vector(), k.vector(), k.vector()
	VBROADCASTSD(param("peak"), peak)
	k.limits(peak, middleLimit, sideLimit)

	Label("windows")
	middle, side := k.waveform(w, taps/2-nearPairs, near, mask)
	k.jumpUnlessAny(notLessOrEqual, []parts{middle, side}, []reg.VecVirtual{middleLimit, sideLimit}, "next")
	middle, side = k.waveform(w, 0, h, mask)
	Comment("a NaN gives way to the peak")
	for i := range middle {
		VMAXPD(peak, middle[i], middle[i])
		VMAXPD(middle[i], side[i], side[i])
	}
	k.jumpUnlessAny(greater, []parts{side}, []reg.VecVirtual{peak}, "next")
	for _, v := range side[1:] {
		VMAXPD(v, side[0], side[0])
	}
	k.horizontal(side[0])
	VMOVAPD(side[0], peak)
	k.limits(peak, middleLimit, sideLimit)
	Label("next")
	w.advance()
	SUBQ(Imm(group), left)
	JNZ(LabelRef("windows"))
	result, err := ReturnIndex(0).Resolve()
	if err != nil {
		panic(err)
	}
	VMOVSD(peak.AsX(), result.Addr)
	VZEROUPPER()
	RET()
}

func param(name string) Mem {
	c, err := Param(name).Resolve()
	if err != nil {
		panic(err)
	}
	return c.Addr
}

// limits sets them to the peak less the slacks.
func (k kernel) limits(peak, middle, side reg.VecVirtual) {
	VBROADCASTSD(param("middleSlack"), middle)
	VSUBPD(middle, peak, middle)
	VBROADCASTSD(param("sideSlack"), side)
	VSUBPD(side, peak, side)
}

// rows tell where the samples of a group of windows are: those of tap k are k strides
// from the first. Each base serves six taps.
type rows struct {
	base                     [4]reg.Register
	stride, stride3, stride5 reg.Register
}

func loadRows() (r rows) {
	r.base[0] = Load(Param("x"), GP64())
	r.stride = Load(Param("stride"), GP64())
	r.stride3, r.stride5 = GP64(), GP64()
	SHLQ(Imm(3), r.stride)
	LEAQ(Mem{Base: r.stride, Index: r.stride, Scale: 2}, r.stride3)
	LEAQ(Mem{Base: r.stride, Index: r.stride, Scale: 4}, r.stride5)
	for i := range r.base[1:] {
		r.base[i+1] = GP64()
		LEAQ(Mem{Base: r.base[i], Index: r.stride3, Scale: 2}, r.base[i+1])
	}
	return r
}

// tap is where the k-th samples of the windows begin.
func (r rows) tap(k int) Mem {
	m := Mem{Base: r.base[k/6]}
	switch k % 6 {
	case 1, 2, 4:
		m.Index, m.Scale = r.stride, uint8(k%6)
	case 3:
		m.Index, m.Scale = r.stride3, 1
	case 5:
		m.Index, m.Scale = r.stride5, 1
	}
	return m
}

func (r rows) advance() {
	for _, b := range r.base {
		ADDQ(Imm(8*group), b)
	}
}

// coefficients returns where the coefficients of a parameter are. With AVX-512 the
// first few are kept in registers, of which it has enough: loads are what limits
// it.
func (k kernel) coefficients(name string, n, kept int) []Op {
	at := Load(Param(name), GP64())
	c := make([]Op, n)
	for i := range c {
		m := Mem{Base: at, Disp: 8 * i}
		c[i] = m
		if k.wide() && i < kept {
			v := k.vector()
			VBROADCASTSD(m, v)
			c[i] = v
		}
	}
	return c
}

// waveform returns the magnitude at n + 2/4, and the larger one of those at n + 1/4
// and n + 3/4. Of the pairs of mirrored samples it takes the first-th and those
// inside of it; h has as many coefficients for each of the three sums.
func (k kernel) waveform(w rows, first int, h []Op, mask reg.VecVirtual) (middle, side parts) {
	var even, odd parts
	pairs := taps/2 - first
	for i := range pairs {
		sum, difference := k.pair(w, first+i)
		middle = k.addProduct(middle, sum, h[i])
		even = k.addProduct(even, sum, h[pairs+i])
		odd = k.addProduct(odd, difference, h[2*pairs+i])
	}
	for _, p := range []parts{middle, even, odd} {
		k.magnitude(p, mask)
	}
	for i := range even {
		VADDPD(odd[i], even[i], even[i])
	}
	return middle, even
}

// pair returns the sum and the difference of mirrored samples.
func (k kernel) pair(w rows, i int) (sum, difference parts) {
	difference, sum = k.load(w.tap(i)), k.parts()
	late := k.load(w.tap(taps - 1 - i))
	for j := range sum {
		VADDPD(late[j], difference[j], sum[j])
		VSUBPD(late[j], difference[j], difference[j])
	}
	return sum, difference
}

// addProduct returns total + c x, or just c x where total is nil.
func (k kernel) addProduct(total, x parts, c Op) parts {
	products := k.parts()
	k.product(products, x, c)
	if total == nil {
		return products
	}
	for i := range total {
		VADDPD(products[i], total[i], total[i])
	}
	return total
}

func (k kernel) product(products, x parts, c Op) {
	multiply := VMULPD
	if m, ok := c.(Mem); ok && k.wide() {
		multiply = VMULPD_BCST
	} else if ok {
		factor := k.vector()
		VBROADCASTSD(m, factor)
		c = factor
	}
	for i := range x {
		multiply(c, x[i], products[i])
	}
}

// jumpUnlessAny goes to label unless one of the values compares so with its limit.
func (k kernel) jumpUnlessAny(predicate uint64, values []parts, limits []reg.VecVirtual, label string) {
	if k.wide() {
		k.jumpUnlessAnyWide(predicate, values, limits, label)
		return
	}
	any := YMM()
	for i, p := range values {
		for j, v := range p {
			hit := YMM()
			VCMPPD(Imm(predicate), limits[i], v, hit)
			if i == 0 && j == 0 {
				any = hit
			} else {
				VORPD(hit, any, any)
			}
		}
	}
	VPTEST(any, any)
	JZ(LabelRef(label))
}

func (k kernel) jumpUnlessAnyWide(predicate uint64, values []parts, limits []reg.VecVirtual, label string) {
	any := K()
	for i, p := range values {
		hit := K()
		VCMPPD(Imm(predicate), limits[i], p[0], hit)
		if i == 0 {
			any = hit
		} else {
			KORW(hit, any, any)
		}
	}
	KORTESTW(any, any)
	JZ(LabelRef(label))
}
