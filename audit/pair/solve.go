package pair

import (
	"math"

	"fettle/filter/response"

	"gonum.org/v1/gonum/dsp/fourier"
)

// toeplitz is a symmetric Toeplitz matrix, made to be multiplied and nearly
// inverted by transforms.
type toeplitz struct {
	n       int
	wide    *fourier.FFT // of a circulant that holds the matrix
	matrix  []float64    // its eigenvalues
	near    *fourier.FFT // of the nearest circulant of the matrix's own size
	inverse []float64    // one over its eigenvalues
	buf     []float64
}

// ridge is what is added to the diagonal, as a share of it: frequencies at which the
// input has less than that share of its power are not worth solving for.
const ridge = 1e-12

// steps bounds conjugate gradients; preconditioned, they take ten to forty.
const steps = 200

// newToeplitz takes the first row, of even length, whose first value is positive.
func newToeplitz(row []float64) *toeplitz {
	n := len(row)
	t := &toeplitz{n: n, wide: fourier.NewFFT(response.NextPow2(2 * n)), near: fourier.NewFFT(n)}
	t.buf = make([]float64, t.wide.Len())
	for m, v := range row {
		t.buf[m] = v
		if m > 0 {
			t.buf[len(t.buf)-m] = v
		}
	}
	t.buf[0] += ridge * row[0]
	t.matrix = realParts(t.wide.Coefficients(nil, t.buf))
	// T. Chan 1988, "An optimal circulant preconditioner for Toeplitz systems".
	c := make([]float64, n)
	for m := range row {
		c[m] = row[m] * float64(n-m) / float64(n)
		if m > 0 {
			c[m] += row[n-m] * float64(m) / float64(n)
		}
	}
	t.inverse = realParts(t.near.Coefficients(nil, c))
	for k, v := range t.inverse {
		t.inverse[k] = 1 / max(v, ridge*row[0])
	}
	return t
}

func realParts(x []complex128) []float64 {
	y := make([]float64, len(x))
	for i, v := range x {
		y[i] = real(v)
	}
	return y
}

// times is the matrix times x.
func (t *toeplitz) times(x []float64) []float64 {
	clear(t.buf)
	copy(t.buf, x)
	return filtered(t.wide, t.buf, t.matrix)[:t.n]
}

// nearly is roughly the inverse of the matrix times x.
func (t *toeplitz) nearly(x []float64) []float64 { return filtered(t.near, x, t.inverse) }

func filtered(fft *fourier.FFT, x, by []float64) []float64 {
	bins := fft.Coefficients(nil, x)
	for k := range bins {
		bins[k] *= complex(by[k]/float64(fft.Len()), 0)
	}
	return fft.Sequence(nil, bins)
}

// solve finds x with the matrix times x near b: conjugate gradients (Hestenes and
// Stiefel 1952), preconditioned, until the residual is small enough. It also ends in a
// direction along which the matrix is not positive: there sums over so little tell
// nothing.
func (t *toeplitz) solve(b []float64, enough float64) []float64 {
	x := make([]float64, t.n)
	r := append([]float64(nil), b...)
	z := t.nearly(r)
	p := append([]float64(nil), z...)
	rz := dot(r, z)
	for range steps {
		if math.Sqrt(dot(r, r)) <= enough || rz == 0 {
			break
		}
		q := t.times(p)
		along := dot(p, q)
		if along <= 0 {
			break
		}
		alpha := rz / along
		for i := range x {
			x[i] += alpha * p[i]
			r[i] -= alpha * q[i]
		}
		z = t.nearly(r)
		next := dot(r, z)
		for i := range p {
			p[i] = z[i] + next/rz*p[i]
		}
		rz = next
	}
	return x
}

func dot(a, b []float64) float64 {
	var sum float64
	for i, v := range a {
		sum += v * b[i]
	}
	return sum
}
