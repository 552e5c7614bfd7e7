//go:build amd64 && !purego

package lanes

import (
	"math/bits"
	"unsafe"
)

// leafPoints is the largest block that is transformed pass by pass. A larger
// one is taken apart depth first: after its own pass each quarter is convolved to
// the end before the next is touched, so that it stays in a near cache.
const leafPoints = 2048

// widePoints is the least block of which the two outermost passes are done in
// one sweep, so that it is taken from a far cache only once.
const widePoints = 16384

// stretch is how many points of a row such a sweep does before it goes on to the
// next stretch: sixteen of them stay in a first-level cache.
const stretch = 64

// pad is put between the sixteen rows, which would otherwise all begin at the
// same place of a cache and drive each other out.
const pad = 72

// cacheLine is in bytes. A vector that lies across two costs twice the time.
const cacheLine = 64

func (v *vector) wide() bool { return v.size >= widePoints }

// scratch returns room for a block, at the start of a cache line.
func (v *vector) scratch() []float64 { return aligned(v.scratchSize()) }

// scratchSize is how much of it convolve writes to.
func (v *vector) scratchSize() int {
	n := 2 * v.size
	if v.wide() {
		n += 2 * 16 * pad
	}
	return n
}

func aligned(n int) []float64 {
	b := make([]float64, n+cacheLine/8-1)
	past := int(uintptr(unsafe.Pointer(&b[0])) % cacheLine / 8)
	skip := (cacheLine/8 - past) % (cacheLine / 8)
	return b[skip : skip+n : skip+n]
}

// convolve is Plan.Convolve.
func (v *vector) convolve(yre, yim, re, im, x []float64) {
	if !v.wide() {
		m := v.size / 4
		v.load4(&x[0], m/v.lanes, &re[0], &im[0], m, m/v.lanes)
		for b := range 4 {
			v.convolveBlock(x[2*m*b:], m, b)
		}
		v.store4(&x[0], m/v.lanes, &yre[0], &yim[0], m, m/v.lanes)
		return
	}
	m := v.size / 16
	v.loadWide(x, re, im)
	for b := range 16 {
		v.convolveBlock(x[2*(m+pad)*b:], m, b)
	}
	v.storeWide(yre, yim, x)
}

// loadWide does the two outermost passes.
func (v *vector) loadWide(x, re, im []float64) {
	m, n := v.size/16, stretch/v.lanes
	row := (m + pad) / v.lanes
	for at := 0; at < m; at += stretch {
		for i := range 4 {
			v.load4(&x[2*((m+pad)*i+at)], 4*row, &re[m*i+at], &im[m*i+at], 4*m, n)
		}
		for b := range 4 {
			v.split4(&x[2*((m+pad)*4*b+at)], row, n, 1, &v.factors[b].w1)
		}
	}
}

// storeWide undoes loadWide, but for a factor of sixteen.
func (v *vector) storeWide(re, im, x []float64) {
	m, n := v.size/16, stretch/v.lanes
	row := (m + pad) / v.lanes
	for at := 0; at < m; at += stretch {
		for b := range 4 {
			v.join4(&x[2*((m+pad)*4*b+at)], row, n, 1, &v.factors[b].w1)
		}
		for i := range 4 {
			v.store4(&x[2*((m+pad)*i+at)], 4*row, &re[m*i+at], &im[m*i+at], 4*m, n)
		}
	}
}

// convolveBlock transforms the m points in front of x, which are block b of
// their level, multiplies them by the spectrum and transforms them back.
func (v *vector) convolveBlock(x []float64, m, b int) {
	if m <= leafPoints {
		v.convolveNear(x, m, b)
		return
	}
	q, w := m/4, &v.factors[b].w1
	v.split4(&x[0], q/v.lanes, q/v.lanes, 1, w)
	for i := range 4 {
		v.convolveBlock(x[2*q*i:], q, 4*b+i)
	}
	v.join4(&x[0], q/v.lanes, q/v.lanes, 1, w)
}

// convolveNear does the radix-2 pass first, if there is one, where the points
// that share a factor are most.
func (v *vector) convolveNear(x []float64, m, b int) {
	if bits.TrailingZeros(uint(m/v.lanes))%2 == 0 {
		v.convolveQuarters(x, m, m, b)
		return
	}
	n, w := m/2/v.lanes, &v.factors[b].w1
	v.split2(&x[0], n, n, 1, w)
	v.convolveQuarters(x, m, m/2, 2*b)
	v.join2(&x[0], n, n, 1, w)
}

// convolveQuarters convolves all the blocks of s points in m of them. The first
// is number b of its level.
func (v *vector) convolveQuarters(x []float64, m, s, b int) {
	first := s * b
	for t := s; t > v.lanes; t /= 4 {
		q := t / 4 / v.lanes
		v.split4(&x[0], q, q, m/t, &v.factors[first/t].w1)
	}
	group := v.lanes * v.lanes
	v.convolveLeaf(&x[0], m/group, &v.leaves[first/group*(len(v.leaves)/(v.size/group))])
	for t := 4 * v.lanes; t <= s; t *= 4 {
		q := t / 4 / v.lanes
		v.join4(&x[0], q, q, m/t, &v.factors[first/t].w1)
	}
}
