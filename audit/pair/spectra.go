package pair

import (
	"math"

	"fettle/audit/estimate"

	"gonum.org/v1/gonum/dsp/fourier"
)

// spectra are sums of auto- and cross-spectra over segments (Welch 1967), at twice as
// many points as a segment has: so that they are those of its correlations at all
// lags.
type spectra struct {
	segments int
	xx, yy   []float64
	xy       []complex128 // conj(X)·Y
	// long and across are the spectra of the correlations of a segment of the original,
	// and of the processed recording, with the original all around it, to a quarter of
	// a segment: as they are, with no window to be undone.
	long   []float64
	across []complex128
}

// newSpectra makes room for segments of a size.
func newSpectra(size int) *spectra {
	return &spectra{
		xx: make([]float64, size+1), yy: make([]float64, size+1), xy: make([]complex128, size+1),
		long: make([]float64, size+1), across: make([]complex128, size+1),
	}
}

// size is that of a segment.
func (s *spectra) size() int { return len(s.xx) - 1 }

// add takes in another sum, or, with a negative sign, takes it out.
func (s *spectra) add(o *spectra, sign int) {
	f := float64(sign)
	s.segments += sign * o.segments
	for k := range s.xx {
		s.xx[k] += f * o.xx[k]
		s.yy[k] += f * o.yy[k]
		s.xy[k] += complex(f, 0) * o.xy[k]
		s.long[k] += f * o.long[k]
		s.across[k] += complex(f, 0) * o.across[k]
	}
}

// without is the sum less one of its parts.
func (s *spectra) without(o *spectra) *spectra {
	t := newSpectra(s.size())
	t.add(s, 1)
	t.add(o, -1)
	return t
}

// welch transforms segments under a Hann window.
type welch struct {
	size   int
	fft    *fourier.FFT // of twice the size
	window []float64    // of a segment
	wide   []float64    // of what is around it
	buf    []float64
	x, y   []complex128
	around []complex128
}

func newWelch(size int) *welch {
	w := &welch{
		size: size, fft: fourier.NewFFT(2 * size), window: make([]float64, size), buf: make([]float64, 2*size),
		x: make([]complex128, size+1), y: make([]complex128, size+1), around: make([]complex128, size+1),
		wide: make([]float64, 2*size),
	}
	for n := range w.window {
		w.window[n] = 0.5 - 0.5*math.Cos(2*math.Pi*float64(n)/float64(size))
	}
	// Flat over the segment and a quarter of it on either side, falling to 0 over
	// another quarter.
	for n := range w.wide {
		u := 4 * float64(min(n, 2*size-n)) / float64(size)
		w.wide[n] = math.Sin(math.Pi / 2 * min(u, 1))
		w.wide[n] *= w.wide[n]
	}
	return w
}

// transform is that of a segment, in the middle of twice as much.
func (w *welch) transform(dst []complex128, x []float64) {
	clear(w.buf)
	for n, v := range x {
		w.buf[w.size/2+n] = v * w.window[n]
	}
	w.fft.Coefficients(dst, w.buf)
}

// surround transforms the original around a segment, twice as long as it.
func (w *welch) surround(x []float64) {
	for n, v := range x {
		w.buf[n] = v * w.wide[n]
	}
	w.fft.Coefficients(w.around, w.buf)
}

// pair adds one segment of both signals to auto- and cross-spectra.
func (w *welch) pair(s *spectra, x, y []float64) {
	w.transform(w.x, x)
	w.transform(w.y, y)
	s.segments++
	for k, a := range w.x {
		b := w.y[k]
		s.xx[k] += estimate.Power(a)
		s.yy[k] += estimate.Power(b)
		s.xy[k] += cross(a, b)
	}
}

// segment adds one segment to all sums: y, and the original around it, twice as long.
func (w *welch) segment(s *spectra, around, y []float64) {
	w.pair(s, around[w.size/2:3*w.size/2], y)
	w.surround(around)
	for k, a := range w.around {
		s.long[k] += real(cross(a, w.x[k])) // both directions of lag are the same but for the ends
		s.across[k] += cross(a, w.y[k])
	}
}

// cross is conj(a)·b.
func cross(a, b complex128) complex128 {
	return complex(real(a)*real(b)+imag(a)*imag(b), real(a)*imag(b)-imag(a)*real(b))
}

// left adds to sum the cross-spectrum of the original with what a response leaves of
// the output y, as across has it; the response is what transfer made of it.
func (w *welch) left(sum []complex128, around, y []float64, response []complex128) {
	w.fft.Coefficients(w.x, around)
	for k, v := range response {
		w.x[k] *= v
	}
	w.fft.Sequence(w.buf, w.x)
	e := make([]float64, w.size)
	for n := range e {
		e[n] = y[n] - w.buf[w.size/2+n]
	}
	w.transform(w.y, e)
	w.surround(around)
	for k, a := range w.around {
		sum[k] += cross(a, w.y[k])
	}
}

// transfer is what left wants of a response whose time 0 is its middle.
func (w *welch) transfer(h []float64) []complex128 {
	clear(w.buf)
	for i, v := range h {
		w.buf[(i-len(h)/2+len(w.buf))%len(w.buf)] = v / float64(len(w.buf))
	}
	return w.fft.Coefficients(nil, w.buf)
}

// row is the first row of the matrix of the normal equations for a response of reach to either
// side: the input's correlation at lags 0 to 2·reach-1.
func (w *welch) row(long []float64, reach int) []float64 {
	for k, v := range long {
		w.x[k] = complex(v/float64(len(w.buf)), 0)
	}
	return append([]float64(nil), w.fft.Sequence(w.buf, w.x)[:2*reach]...)
}

// right is the right side of the normal equations: the cross-correlation at lags -reach to
// reach-1.
func (w *welch) right(across []complex128, reach int) []float64 {
	points := len(w.buf)
	for k, v := range across {
		w.x[k] = v / complex(float64(points), 0)
	}
	w.fft.Sequence(w.buf, w.x)
	return append(append([]float64(nil), w.buf[points-reach:]...), w.buf[:reach]...)
}

// coherence is γ² over the bins from lo up to hi: the coherent output power
// Σ|Sxy|²/Sxx (Bendat and Piersol) over the output power ΣSyy. 0 where there is none.
func (s *spectra) coherence(lo, hi int) float64 {
	coherent, output := 0.0, 0.0
	for k := max(lo, 0); k < min(hi, len(s.xx)); k++ {
		coherent += s.coherent(k)
		output += s.yy[k]
	}
	if output == 0 {
		return 0
	}
	return coherent / output
}

// coherent is the output power of bin k that is a linear function of the input.
func (s *spectra) coherent(k int) float64 {
	if s.xx[k] == 0 {
		return 0
	}
	return estimate.Power(s.xy[k]) / s.xx[k]
}

// gain is the coherent output power over the input power.
func (s *spectra) gain() float64 {
	var coherent, input float64
	for k, v := range s.xx {
		coherent += s.coherent(k)
		input += v
	}
	return coherent / input
}

// weights are how far each bin may be believed, 0 to 1, by the coherence over a third
// of an octave about it.
func (s *spectra) weights() []float64 {
	n := len(s.xx)
	coherent, output := make([]float64, n+1), make([]float64, n+1) // sums up to a bin
	for k := range n {
		coherent[k+1], output[k+1] = coherent[k]+s.coherent(k), output[k]+s.yy[k]
	}
	chance := 2 / float64(s.segments)
	w := make([]float64, n)
	for k := range w {
		half := max(16, k/9)
		lo, hi := max(k-half, 0), min(k+half+1, n)
		if out := output[hi] - output[lo]; out > 0 {
			w[k] = min(max(((coherent[hi]-coherent[lo])/out-chance)/believed, 0), 1)
		}
	}
	return w
}

// believed is how far above chance the coherence is that a bin is believed at.
const believed = 0.2
