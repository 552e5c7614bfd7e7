package response

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/dsp/fourier"
)

// Transform takes real sequences, padded with zeros, to bins 0 to K/2 of their transforms
// of K points: bin k is at omega = 2 pi k/K, not normalised. It needs little memory, much
// less than the bins of a long one would fill. It may be used again and again, by one
// goroutine at a time.
type Transform struct {
	size int
	by   transformer
}

// Sequence is what a transform is taken of: X, or its first moments.
type Sequence struct {
	X []float64
	// Moments asks for (n - Origin) X[n] in place of X[n].
	Moments bool
	Origin  float64
}

// transformer is a way to do what Transform does.
type transformer interface {
	within(first, last int, visit func(k int, v []complex128), sequences []Sequence)
	mapped(x []float64, f func(complex128) complex128, n int) []float64
}

// A transform is made in one piece where that takes little memory and its length is less
// than sparse times the sequence's, so that there is not much to be saved on zeros.
const (
	mostWhole = 1 << 17
	sparse    = 4
)

// NewTransform makes the transform of size points for sequences of up to length samples.
// It panics unless size is even, at least 2 and at least length. One of small prime
// factors is fast.
func NewTransform(size, length int) *Transform {
	if size < 2 || size%2 != 0 {
		panic(fmt.Sprintf("response: transform length %d is not an even number from 2 up", size))
	}
	if length > size {
		panic(fmt.Sprintf("response: %d taps do not fit a transform of %d", length, size))
	}
	if size < 2*leastComb || size <= mostWhole && size < sparse*length {
		return &Transform{size, &whole{fft: fourier.NewFFT(size), padded: make([]float64, size)}}
	}
	return &Transform{size, newCombs(size, length)}
}

// Each visits the bins 0 to K/2, each once, in no order that matters; v holds the bin's
// values, one a sequence, up to the next visit.
func (t *Transform) Each(visit func(k int, v []complex128), sequences ...Sequence) {
	t.by.within(0, t.size/2, visit, sequences)
}

// Within visits the bins first to last.
func (t *Transform) Within(first, last int, visit func(k int, v []complex128), sequences ...Sequence) {
	t.by.within(first, last, visit, sequences)
}

// Map returns the first n samples, n up to K, of the real sequence whose transform is f of
// the transform of x. f takes conjugates to conjugates. What of that sequence is longer
// than K wraps round.
func (t *Transform) Map(x []float64, f func(complex128) complex128, n int) []float64 {
	return t.by.mapped(x, f, n)
}

// Spectrum returns bins 0..k/2 of the k-point transform of taps padded with
// zeros: bin i is H(2 pi i/k), not normalised. It panics unless k is even, at
// least 2 and at least len(taps). A k of small prime factors is fast.
func Spectrum(taps []float64, k int) []complex128 {
	t := NewTransform(k, len(taps))
	spectrum := make([]complex128, k/2+1)
	t.Each(func(k int, v []complex128) { spectrum[k] = v[0] }, Sequence{X: taps})
	return spectrum
}

// whole makes transforms in one piece.
type whole struct {
	fft     *fourier.FFT
	padded  []float64
	spectra [][]complex128 // one a sequence
}

func (w *whole) within(first, last int, visit func(k int, v []complex128), sequences []Sequence) {
	for i, s := range sequences {
		if i == len(w.spectra) {
			w.spectra = append(w.spectra, make([]complex128, len(w.padded)/2+1))
		}
		for n, v := range s.X {
			if s.Moments {
				v *= float64(n) - s.Origin
			}
			w.padded[n] = v
		}
		clear(w.padded[len(s.X):])
		w.fft.Coefficients(w.spectra[i], w.padded)
	}
	v := make([]complex128, len(sequences))
	for k := first; k <= last; k++ {
		for i := range v {
			v[i] = w.spectra[i][k]
		}
		visit(k, v)
	}
}

func (w *whole) mapped(x []float64, f func(complex128) complex128, n int) []float64 {
	out := make([]float64, len(w.padded))
	copy(out, x)
	bins := w.fft.Coefficients(nil, out)
	for k, v := range bins {
		bins[k] = f(v) / complex(float64(len(out)), 0)
	}
	return append([]float64(nil), w.fft.Sequence(out, bins)[:n]...)
}

// fraction is e^(-j2π part/whole).
func fraction(part, whole int) complex128 {
	return turn(-2 * math.Pi * float64(part%whole) / float64(whole))
}
