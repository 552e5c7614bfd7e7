package design

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
)

// MaxLeastSquares is the longest kernel that LeastSquares designs; the work
// grows with the cube of the length.
const MaxLeastSquares = 2047

// LeastSquares returns the kernel that makes the sum over the bands of weight
// times the integral of the squared deviation the least possible. All four
// linear-phase types are designed; bands may touch. A weight counts against the
// square of the deviation.
//
// Long kernels with wide transitions leave the gain between the bands nearly
// undetermined. Where rounding makes it altogether so, the taps' own energy is
// counted too, with the least weight from 1e-15 of the largest up that helps.
//
// Errors: what BandSpec.Validate reports; more than MaxLeastSquares taps.
//
// Source: Parks & Burrus, Digital Filter Design (1987), section 3.2 (integral
// squared error with don't-care bands and weights).
func LeastSquares(s BandSpec) ([]float64, error) {
	taps, err := leastSquares(s)
	if err != nil {
		return nil, fmt.Errorf("least squares, %d taps: %w", s.Taps, err)
	}
	return taps, nil
}

func leastSquares(s BandSpec) ([]float64, error) {
	if err := s.Validate(); err != nil {
		return nil, err
	}
	if s.Taps > MaxLeastSquares {
		return nil, fmt.Errorf("more than %d taps are not designed by least squares; use the family kaiser", MaxLeastSquares)
	}
	if s.cosines() < 1 {
		return nil, fmt.Errorf("one tap cannot be antisymmetric; ask for at least 2")
	}
	b := s.basis()
	x, err := solveSymmetric(b.matrix(s), b.target(s))
	if err != nil {
		return nil, err
	}
	return mirrored(b.taps(x, s.Taps), s.Antisymmetric), nil
}

// basis is the functions cos(a omega) or sin(a omega) whose sum is the
// amplitude; a runs from first by ones.
type basis struct {
	first float64
	count int
	sine  bool
}

func (s BandSpec) basis() basis {
	b := basis{first: 0.5, count: s.cosines(), sine: s.Antisymmetric}
	if s.Taps%2 == 1 {
		b.first = 0
		if s.Antisymmetric {
			b.first = 1
		}
	}
	return b
}

// matrix returns the weighted inner products of the basis: of a product of two
// cosines or sines, half the sum or difference of cosines.
func (b basis) matrix(s BandSpec) *mat.SymDense {
	apart, together := make([]float64, b.count), make([]float64, 2*b.count-1)
	for k := range apart {
		apart[k] = s.integral(float64(k)) / 2
	}
	for k := range together {
		together[k] = s.integral(2*b.first+float64(k)) / 2
		if b.sine {
			together[k] = -together[k]
		}
	}
	m := mat.NewSymDense(b.count, nil)
	for i := range b.count {
		for j := i; j < b.count; j++ {
			m.SetSym(i, j, apart[j-i]+together[i+j])
		}
	}
	return m
}

// integral of weight times cos(a omega) over the bands.
func (s BandSpec) integral(a float64) float64 {
	sum := 0.0
	for _, b := range s.Bands {
		middle, half := s.middleAndHalf(b)
		sum += b.Weight * 2 * half * math.Cos(a*middle) * sinc(a*half/math.Pi)
	}
	return sum
}

func (s BandSpec) middleAndHalf(b Band) (middle, half float64) {
	from, to := s.radians(b.From), s.radians(b.To)
	return (from + to) / 2, (to - from) / 2
}

// target returns the weighted inner products of basis and wanted gain. About a
// band's middle the gain is an even part, a constant, and an odd one, a slope.
func (b basis) target(s BandSpec) *mat.VecDense {
	v := mat.NewVecDense(b.count, nil)
	for k := range b.count {
		a := b.first + float64(k)
		sum := 0.0
		for _, band := range s.Bands {
			middle, half := s.middleAndHalf(band)
			sin, cos := math.Sincos(a * middle)
			even, odd := cos, -sin
			if b.sine {
				even, odd = sin, cos
			}
			mean, rise := (band.GainFrom+band.GainTo)/2, (band.GainTo-band.GainFrom)/2
			sum += band.Weight * 2 * half * (mean*even*sinc(a*half/math.Pi) + rise*odd*slopeSine(a*half))
		}
		v.SetVec(k, sum)
	}
	return v
}

// slopeSine is the mean over -1..1 of t sin(x t): (sin x - x cos x)/x^2.
func slopeSine(x float64) float64 {
	if math.Abs(x) < 0.1 {
		y := x * x
		return x / 3 * (1 - y/10*(1-y/28*(1-y/54*(1-y/88))))
	}
	sin, cos := math.Sincos(x)
	return (sin - x*cos) / (x * x)
}

// solveSymmetric solves m x = v for a matrix that is positive definite but for
// rounding.
func solveSymmetric(m *mat.SymDense, v *mat.VecDense) (*mat.VecDense, error) {
	n := m.SymmetricDim()
	largest := 0.0
	for i := range n {
		largest = math.Max(largest, m.At(i, i))
	}
	var factors mat.Cholesky
	added := 0.0
	for share := 1e-15; !factors.Factorize(m); share *= 10 {
		if !(share < 1e-8) {
			return nil, fmt.Errorf("the bands do not determine the taps; widen them or take fewer taps")
		}
		for i := range n {
			m.SetSym(i, i, m.At(i, i)+share*largest-added)
		}
		added = share * largest
	}
	x := mat.NewVecDense(n, nil)
	// A condition number too large for full accuracy is what wide transitions
	// bring; the bands themselves are still met.
	if err := factors.SolveVecTo(x, v); err != nil {
		if _, poor := err.(mat.Condition); !poor {
			return nil, err
		}
	}
	return x, nil
}

// taps lays the solution out: each cosine or sine is two taps of half its
// height, the constant one tap.
func (b basis) taps(x *mat.VecDense, n int) []float64 {
	taps := make([]float64, n)
	for k := range b.count {
		at := int(float64(n-1)/2 - b.first - float64(k))
		taps[at] = x.AtVec(k) / 2
		if b.first == 0 && k == 0 {
			taps[at] *= 2
		}
	}
	return taps
}
