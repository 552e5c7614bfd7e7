package design

import (
	"math"
	"math/cmplx"
	"sort"

	"fettle/filter/response"
)

// Sections factors the filter into second-order sections, the last of them of
// first order in B2 and A2 if the order is odd. Poles are taken from the one
// nearest the unit circle inwards, each pair with the zeros nearest to it
// (Oppenheim & Schafer, section on cascade structures); the cascade runs the
// other way, so the sharpest section comes last. The gain is spread so that the
// cascade up to any section peaks at 1, and the last section brings the whole
// to its gain. A section's coefficients are rounded so that its value at z = 1
// (or -1), which governs low (high) corners, is as exact as float64 allows, and
// the gain is set where the filter is strongest, after that rounding.
//
// A section by itself peaks below 40 dB, except in a band several decades wide,
// where zeros far from both edges make it up to 20 log10(hi/lo) - 20 dB more (5
// dB on top in a Chebyshev1 band-stop: its poles are sharp, and all its zeros
// lie midway).
//
// Panics if the zeros are not as many as the poles, or a complex root has no
// conjugate.
func (f ZPK) Sections() []response.Section {
	if len(f.Z) != len(f.P) {
		panic("design: a filter needs as many zeros as poles to be factored")
	}
	if len(f.P) == 0 {
		return []response.Section{{B0: f.K}}
	}
	sections := pairNearest(newRootPool(f.Z), newRootPool(f.P))
	return f.spreadGain(sections)
}

// rootPool holds roots not yet used: complex ones by their upper half.
type rootPool struct {
	pairs []complex128
	reals []float64
}

func newRootPool(roots []complex128) *rootPool {
	pool := &rootPool{}
	lower := 0
	for _, r := range roots {
		switch {
		case imag(r) > 0:
			pool.pairs = append(pool.pairs, r)
		case imag(r) < 0:
			lower++
		default:
			pool.reals = append(pool.reals, real(r))
		}
	}
	if lower != len(pool.pairs) {
		panic("design: a complex root has no conjugate")
	}
	sort.Slice(pool.pairs, func(i, j int) bool { return cmplx.Abs(pool.pairs[i]) > cmplx.Abs(pool.pairs[j]) })
	sort.Slice(pool.reals, func(i, j int) bool { return math.Abs(pool.reals[i]) > math.Abs(pool.reals[j]) })
	return pool
}

// takePoles removes the roots of the next section: the pair or the two reals
// that reach nearest to the unit circle.
func (pool *rootPool) takePoles() []complex128 {
	pairFirst := len(pool.reals) == 0
	if len(pool.pairs) > 0 && !pairFirst {
		pairFirst = cmplx.Abs(pool.pairs[0]) >= math.Abs(pool.reals[0])
	}
	if pairFirst {
		p := pool.pairs[0]
		pool.pairs = pool.pairs[1:]
		return []complex128{p, cmplx.Conj(p)}
	}
	count := min(2, len(pool.reals))
	var taken []complex128
	for _, r := range pool.reals[:count] {
		taken = append(taken, complex(r, 0))
	}
	pool.reals = pool.reals[count:]
	return taken
}

// takeNear removes the zeros to go with the poles: the nearest pair, or the
// real zeros nearest to each pole, whichever leaves the farther zero closer. A
// single pole takes a single zero.
func (pool *rootPool) takeNear(poles []complex128) []complex128 {
	pair := nearest(pool.pairs, poles[0])
	if len(poles) == 2 && pair >= 0 && cmplx.Abs(pool.pairs[pair]-poles[0]) <= pool.fartherReal(poles[0]) {
		z := pool.pairs[pair]
		pool.pairs = append(pool.pairs[:pair], pool.pairs[pair+1:]...)
		return []complex128{z, cmplx.Conj(z)}
	}
	var taken []complex128
	for _, p := range poles {
		taken = append(taken, pool.takeReal(p))
	}
	return taken
}

// fartherReal returns the distance of the second nearest real zero, infinite
// if there are not two.
func (pool *rootPool) fartherReal(to complex128) float64 {
	if len(pool.reals) < 2 {
		return math.Inf(1)
	}
	distances := make([]float64, len(pool.reals))
	for i, r := range pool.reals {
		distances[i] = cmplx.Abs(complex(r, 0) - to)
	}
	sort.Float64s(distances)
	return distances[1]
}

func (pool *rootPool) takeReal(near complex128) complex128 {
	i := nearestReal(pool.reals, near)
	r := pool.reals[i]
	pool.reals = append(pool.reals[:i], pool.reals[i+1:]...)
	return complex(r, 0)
}

func nearest(roots []complex128, to complex128) int {
	best := -1
	for i, r := range roots {
		if best < 0 || cmplx.Abs(r-to) < cmplx.Abs(roots[best]-to) {
			best = i
		}
	}
	return best
}

func nearestReal(roots []float64, to complex128) int {
	complexes := make([]complex128, len(roots))
	for i, r := range roots {
		complexes[i] = complex(r, 0)
	}
	return nearest(complexes, to)
}

// pairNearest uses up both pools and returns unscaled sections, the sharpest
// last.
func pairNearest(zeros, poles *rootPool) []response.Section {
	var sections []response.Section
	for len(poles.pairs)+len(poles.reals) > 0 {
		p := poles.takePoles()
		sections = append(sections, unscaled(zeros.takeNear(p), p))
	}
	for i, j := 0, len(sections)-1; i < j; i, j = i+1, j-1 {
		sections[i], sections[j] = sections[j], sections[i]
	}
	return sections
}

// unscaled multiplies out one section with B0 = 1.
func unscaled(zeros, poles []complex128) response.Section {
	s := response.Section{B0: 1}
	s.B1, s.B2 = multiplied(zeros)
	s.A1, s.A2 = multiplied(poles)
	return s
}

// multiplied expands one or two factors (1 - r/z). The product term is chosen,
// within its last digit, so that the value at z = 1 (or -1, in the left half)
// is right: that value is a difference of numbers near 1 and is tiny for a low
// corner, where a plain rounding would cost up to four times as much. Roots on
// the unit circle keep a product of exactly 1.
func multiplied(roots []complex128) (linear, square float64) {
	if len(roots) == 1 {
		return -real(roots[0]), 0
	}
	linear = -real(roots[0] + roots[1])
	product := real(roots[0] * roots[1])
	if math.Abs(math.Abs(product)-1) < 1e-15 {
		return linear, math.Round(product)
	}
	if linear > 0 {
		atMinusOne := real((1 + roots[0]) * (1 + roots[1]))
		return linear, atMinusOne + (linear - 1)
	}
	atOne := real((1 - roots[0]) * (1 - roots[1]))
	return linear, atOne + (-linear - 1)
}

// spreadGain scales the sections in place. The frequencies looked at are both
// ends and the angles of all poles and of points beside them: a rational
// response has its peaks there.
func (f ZPK) spreadGain(sections []response.Section) []response.Section {
	omegas := f.telling()
	peak := make([]float64, len(omegas))
	for i := range peak {
		peak[i] = 1
	}
	for i := range sections {
		largest := 0.0
		for j, omega := range omegas {
			peak[j] *= cmplx.Abs(response.SectionsAt(sections[i:i+1], omega))
			largest = math.Max(largest, peak[j])
		}
		scale(&sections[i], 1/largest)
		for j := range peak {
			peak[j] /= largest
		}
	}
	reference := f.strongest(omegas)
	wanted := f.At(reference)
	reached := response.SectionsAt(sections, reference)
	gain := math.Copysign(cmplx.Abs(wanted)/cmplx.Abs(reached), real(wanted/reached))
	scale(&sections[len(sections)-1], gain)
	return sections
}

// telling lists 0, pi, a coarse logarithmic grid, and each pole's angle with
// points up to three of its half bandwidths to either side.
func (f ZPK) telling() []float64 {
	omegas := []float64{0, math.Pi}
	for omega := 1e-5; omega < math.Pi; omega *= 1.25 {
		omegas = append(omegas, omega)
	}
	for _, p := range f.P {
		if imag(p) <= 0 {
			continue
		}
		for step := -3.0; step <= 3; step += 0.5 {
			omega := cmplx.Phase(p) + step*(1-cmplx.Abs(p))
			if omega > 0 && omega < math.Pi {
				omegas = append(omegas, omega)
			}
		}
	}
	return omegas
}

func (f ZPK) strongest(omegas []float64) float64 {
	best, largest := 0.0, -1.0
	for _, omega := range omegas {
		if h := cmplx.Abs(f.At(omega)); h > largest {
			best, largest = omega, h
		}
	}
	return best
}

func scale(s *response.Section, gain float64) {
	s.B0 *= gain
	s.B1 *= gain
	s.B2 *= gain
}
