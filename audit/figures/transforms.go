package figures

import (
	"math/cmplx"

	"gonum.org/v1/gonum/dsp/fourier"
)

// plans keeps the transforms of one measurement: making one costs as much as
// using it, and band ring asks for the same few lengths again and again.
type plans struct {
	real map[int]*fourier.FFT
	full map[int]*fourier.CmplxFFT
}

func newPlans() *plans {
	return &plans{real: map[int]*fourier.FFT{}, full: map[int]*fourier.CmplxFFT{}}
}

// forward is the transform of the real sequence x padded with zeros to length n: n/2+1 bins.
func (p *plans) forward(x []float64, n int) []complex128 {
	padded := make([]float64, n)
	copy(padded, x)
	return p.realOf(n).Coefficients(nil, padded)
}

// inverse is the real sequence of length n whose transform is c; it overwrites nothing.
func (p *plans) inverse(c []complex128, n int) []float64 {
	x := p.realOf(n).Sequence(nil, c)
	scale := 1 / float64(n)
	for i := range x {
		x[i] *= scale
	}
	return x
}

// analytic is the sequence of length n whose transform is c at bins 0..len(c)-1 and
// zero above: Σ c[k]·e^(j2πki/n), not normalised.
func (p *plans) analytic(c []complex128, n int) []complex128 {
	padded := make([]complex128, n)
	copy(padded, c)
	plan, ok := p.full[n]
	if !ok {
		plan = fourier.NewCmplxFFT(n)
		p.full[n] = plan
	}
	return plan.Sequence(padded, padded)
}

func (p *plans) realOf(n int) *fourier.FFT {
	plan, ok := p.real[n]
	if !ok {
		plan = fourier.NewFFT(n)
		p.real[n] = plan
	}
	return plan
}

// convolve is the linear convolution of a and b, of length len(a)+len(b)-1.
func (p *plans) convolve(a, b []float64) []float64 {
	length := len(a) + len(b) - 1
	n := fastLength(length)
	fa, fb := p.forward(a, n), p.forward(b, n)
	for k := range fa {
		fa[k] *= fb[k]
	}
	return p.inverse(fa, n)[:length]
}

// fastLength is the least 2^k or 3·2^k that is at least n, and a multiple of 8.
func fastLength(n int) int {
	for size := 8; ; size *= 2 {
		if size >= n {
			return size
		}
		if three := size + size/2; size >= 16 && three >= n {
			return three
		}
	}
}

// power is |c|² without the square root of cmplx.Abs.
func power(c complex128) float64 { return real(c)*real(c) + imag(c)*imag(c) }

// turn is e^(jx).
func turn(x float64) complex128 { return cmplx.Rect(1, x) }
