package design

import (
	"math"

	"fettle/filter/response"

	"gonum.org/v1/gonum/dsp/fourier"
)

// curve is the cosine polynomial through a reference: r+1 points at which its
// weighted error is +delta and -delta in turn. It is held by values, in
// barycentric form, never by coefficients.
type curve struct {
	sin2, cos2  []float64 // of the reference
	pull, value []float64 // barycentric weights, polynomial
	drawn       []float64 // their product
	delta       float64
}

// through solves for delta and values at a reference in ascending order.
func through(ref []gridPoint) *curve {
	n := len(ref)
	c := &curve{sin2: make([]float64, n), cos2: make([]float64, n)}
	for k, p := range ref {
		c.sin2[k], c.cos2[k] = p.sin2, p.cos2
	}
	c.pull = barycentricWeights(ref)
	above, below, sign := 0.0, 0.0, 1.0
	for k, p := range ref {
		above += c.pull[k] * p.want
		below += sign * c.pull[k] / p.weight
		sign = -sign
	}
	c.delta = above / below
	if c.delta == 0 {
		c.delta = 1e-300 // a reference that a polynomial meets still alternates, so that it can be exchanged
	}
	sign = 1.0
	values := make([]float64, n)
	for k, p := range ref {
		values[k] = p.want - sign*c.delta/p.weight
		sign = -sign
	}
	c.set(values)
	return c
}

func (c *curve) set(values []float64) {
	c.value, c.drawn = values, make([]float64, len(values))
	for k, v := range values {
		c.drawn[k] = c.pull[k] * v
	}
}

// barycentricWeights are 1 over the products of the differences in cos(omega),
// scaled to a largest of 1. The products are kept in range by exponents, since
// half a thousand factors over two bands span hundreds of decades.
func barycentricWeights(ref []gridPoint) []float64 {
	weights, exponents := make([]float64, len(ref)), make([]int, len(ref))
	least := math.MaxInt
	for k := range ref {
		weights[k], exponents[k] = differences(ref, k)
		least = min(least, exponents[k])
	}
	for k := range weights {
		weights[k] = math.Ldexp(1/weights[k], least-exponents[k])
	}
	return weights
}

// differences returns the product of 2 (x_k - x_j), x = cos(omega), over all
// other j, as mantissa and binary exponent.
func differences(ref []gridPoint, k int) (product float64, exponent int) {
	product = 1
	p := &ref[k]
	left := p.sin2 < 0.5
	for j := range ref {
		if j == k {
			continue
		}
		if left {
			product *= 4 * (ref[j].sin2 - p.sin2)
		} else {
			product *= 4 * (p.cos2 - ref[j].cos2)
		}
		if j%8 == 7 {
			mantissa, e := math.Frexp(product)
			product, exponent = mantissa, exponent+e
		}
	}
	mantissa, e := math.Frexp(product)
	return mantissa, exponent + e
}

// at evaluates the polynomial by the second barycentric formula (Berrut &
// Trefethen 2004, eq. 4.2).
func (c *curve) at(p *gridPoint) float64 {
	if p.sin2 < 0.5 {
		return c.ratio(c.sin2, p.sin2)
	}
	return c.ratio(c.cos2, p.cos2)
}

// ratio adds the formula's terms two by two over a common denominator: its
// time is that of the divisions.
func (c *curve) ratio(nodes []float64, x float64) float64 {
	pull, drawn := c.pull[:len(nodes)], c.drawn[:len(nodes)]
	above, below := 0.0, 0.0
	k := 0
	for ; k+1 < len(nodes); k += 2 {
		d, e := nodes[k]-x, nodes[k+1]-x
		both := d * e
		if both == 0 {
			return c.onNode(nodes, x)
		}
		both = 1 / both
		above += (drawn[k]*e + drawn[k+1]*d) * both
		below += (pull[k]*e + pull[k+1]*d) * both
	}
	for ; k < len(nodes); k++ {
		d := nodes[k] - x
		if d == 0 {
			return c.onNode(nodes, x)
		}
		above += drawn[k] / d
		below += pull[k] / d
	}
	return above / below
}

func (c *curve) onNode(nodes []float64, x float64) float64 {
	for k, node := range nodes {
		if node == x {
			return c.value[k]
		}
	}
	return math.NaN()
}

// errorAt is the weighted error: positive where the polynomial is too low.
func (c *curve) errorAt(p *gridPoint) float64 { return p.weight * (p.want - c.at(p)) }

// tapsOf turns a solution into a kernel: the polynomial sampled all round the
// circle and transformed, then its type's factor multiplied in as a kernel of
// two or three taps.
//
// Across a wide transition interpolation magnifies rounding a million times
// and more. So the kernel is read at the reference, where it is known, and the
// difference interpolated and added, until it does not shrink any more.
func (s BandSpec) tapsOf(d *solution) []float64 {
	cosine := make([]float64, 2*s.cosines()-1)
	rest := *d.curve
	for before := math.Inf(1); ; {
		for i, h := range rest.cosineKernel() {
			cosine[i] += h
		}
		missing, largest := make([]float64, len(d.ref)), 0.0
		for k, p := range d.ref {
			missing[k] = d.curve.value[k] - amplitude(cosine, p.omega)
			largest = math.Max(largest, math.Abs(missing[k]))
		}
		if !(largest < before/4) {
			return mirrored(convolve(cosine, factorTaps(s.Type())), s.Antisymmetric)
		}
		before = largest
		rest.set(missing)
	}
}

// amplitude reads a kernel of type I.
func amplitude(taps []float64, omega float64) float64 {
	middle := len(taps) / 2
	return 2*real(response.TapsAt(taps[middle:], omega)) - taps[middle]
}

// cosineKernel returns the kernel, of type I, whose amplitude is the curve.
func (c *curve) cosineKernel() []float64 {
	r := len(c.value) - 1
	spectrum := make([]complex128, r)
	for k := range spectrum {
		sin, cos := math.Sincos(math.Pi * float64(k) / float64(2*r-1))
		spectrum[k] = complex(c.at(&gridPoint{sin2: sin * sin, cos2: cos * cos}), 0)
	}
	taps := make([]float64, 2*r-1)
	for k, v := range fourier.NewFFT(2*r-1).Sequence(nil, spectrum)[:r] {
		v /= float64(2*r - 1)
		taps[r-1-k], taps[r-1+k] = v, v
	}
	return taps
}

// factorTaps is the kernel whose amplitude is factor.
func factorTaps(t response.Kind) []float64 {
	switch t {
	case response.TypeII:
		return []float64{0.5, 0.5}
	case response.TypeIII:
		return []float64{0.5, 0, -0.5}
	case response.TypeIV:
		return []float64{0.5, -0.5}
	}
	return []float64{1}
}

func convolve(a, b []float64) []float64 {
	out := make([]float64, len(a)+len(b)-1)
	for i, x := range a {
		for j, y := range b {
			out[i+j] += x * y
		}
	}
	return out
}

// mirrored makes the second half of a kernel the exact image of the first, in
// place.
func mirrored(taps []float64, antisymmetric bool) []float64 {
	n := len(taps)
	for i := range n / 2 {
		taps[n-1-i] = taps[i]
		if antisymmetric {
			taps[n-1-i] = -taps[i]
		}
	}
	if antisymmetric && n%2 == 1 {
		taps[n/2] = 0
	}
	return taps
}
