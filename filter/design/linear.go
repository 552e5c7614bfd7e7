package design

import (
	"fmt"
	"math"
	"math/cmplx"
	"sync"

	"fettle/filter/response"

	"gonum.org/v1/gonum/dsp/fourier"
)

// MaxTaps is the longest kernel that is designed. Beyond it the wish is
// better met another way.
const MaxTaps = 1 << 22

// LengthError says that a kernel would be longer than MaxTaps.
type LengthError struct{ Realisation string }

func (e *LengthError) Error() string {
	return fmt.Sprintf("a %s kernel for this would need more than %d taps; widen its narrowest notch or raise its lowest corner, or ask for iir", e.Realisation, MaxTaps)
}

// kaiserBetas are the windows tried on a truncated kernel. A target without
// corners decays fast enough to be cut square (beta 0); a steep one gains from
// a taper. More windows than these bought less than 2 % of length.
var kaiserBetas = []float64{0, 1, 2, 3, 4.5}

// LinearPhase returns the shortest odd-length symmetric kernel that the
// frequency-sampling and window method finds for a target: the zero-phase
// response of the target's Aim, cut to N taps under a Kaiser window, with N
// and the window's beta found by search. The kernel's latency is (N-1)/2.
//
// finest is the width in radians a sample of the target's narrowest feature.
// The search measures on a grid at least eight times as dense as that and as
// the kernel is long, so that no notch is missed between two points.
// It fails with *LengthError beyond MaxTaps.
//
// Source: Rabiner and Gold 1975, ch. 3 (frequency sampling, windows).
func LinearPhase(t Target, finest float64) ([]float64, error) {
	for size := GridFor(finest); ; size *= 2 {
		s := newCutSearch(t, size)
		if half, beta, ok := s.shortest(size / 16); ok {
			return s.kernel(half, beta), nil
		}
		if size/16 > MaxTaps {
			return nil, &LengthError{"linear"}
		}
	}
}

// GridFor is the transform size whose points stand at least eight to a
// feature of the given width.
func GridFor(finest float64) int {
	size := 1 << 12
	for float64(size)*finest < 8*2*math.Pi && size < 32*MaxTaps {
		size *= 2
	}
	return size
}

// cutSearch looks for the shortest cut of one zero-phase response.
type cutSearch struct {
	grid *Grid
	size int
	fft  *fourier.FFT
	zero []float64 // zero-phase response: zero[n] at lags n and -n
	buf  []float64
	spec []complex128
}

func newCutSearch(t Target, size int) *cutSearch {
	s := &cutSearch{grid: t.Sample(size), size: size, fft: fourier.NewFFT(size), buf: make([]float64, size)}
	s.spec = make([]complex128, size/2+1)
	for k := range s.spec {
		s.spec[k] = complex(s.grid.levels[k].Aim, 0)
	}
	s.zero = s.fft.Sequence(nil, s.spec)[:size/2+1]
	for n := range s.zero {
		s.zero[n] /= float64(size)
	}
	return s
}

// shortest finds the least half length up to limit under any window.
func (s *cutSearch) shortest(limit int) (half int, beta float64, ok bool) {
	best := limit + 1
	for _, b := range kaiserBetas {
		// A window that fails at the best length so far can't beat it.
		if !s.met(min(best-1, limit), b) {
			continue
		}
		lo, hi := -1, min(best-1, limit) // lo fails (or is no length), hi is met
		for hi-lo > 1 {
			if mid := (lo + hi) / 2; s.met(mid, b) {
				hi = mid
			} else {
				lo = mid
			}
		}
		best, beta = hi, b
		if best == 0 {
			break
		}
	}
	return best, beta, best <= limit
}

func (s *cutSearch) met(half int, beta float64) bool {
	if half < 0 {
		return false
	}
	clear(s.buf)
	w := newTaper(half, beta)
	s.buf[0] = s.zero[0]
	for n := 1; n <= half; n++ {
		v := s.zero[n] * w.at(n)
		s.buf[n], s.buf[s.size-n] = v, v
	}
	s.fft.Coefficients(s.spec, s.buf)
	taps := sync.OnceValue(func() []float64 { return s.kernel(half, beta) })
	return s.grid.Met(Magnitude{
		Bin: func(k int) float64 { return math.Abs(real(s.spec[k])) },
		At:  func(omega float64) float64 { return cmplx.Abs(response.TapsAt(taps(), omega)) },
	})
}

func (s *cutSearch) kernel(half int, beta float64) []float64 {
	taps := make([]float64, 2*half+1)
	w := newTaper(half, beta)
	for n := 0; n <= half; n++ {
		v := s.zero[n] * w.at(n)
		taps[half-n], taps[half+n] = v, v
	}
	return taps
}

// taper is a Kaiser window that reaches its end value one sample outside the
// kernel, so that no tap is wasted on a zero.
type taper struct{ beta, norm, half float64 }

func newTaper(half int, beta float64) taper {
	return taper{beta, besselI0(beta), float64(half) + 1}
}

func (w taper) at(n int) float64 {
	if w.beta == 0 {
		return 1
	}
	x := float64(n) / w.half
	return besselI0(w.beta*math.Sqrt(1-x*x)) / w.norm
}

// CutTail returns the shortest beginning of h that still meets the target:
// the minimum-phase realisation of a stage that has poles and zeros is its own
// impulse response, cut where the tail left out is below the tolerance.
// h must be long enough to meet the target whole, else ok is false.
// finest is as for LinearPhase.
func CutTail(h []float64, t Target, finest float64) (cut []float64, ok bool) {
	size := GridFor(finest)
	for size < 8*len(h) {
		size *= 2
	}
	grid := t.Sample(size)
	fft := fourier.NewFFT(size)
	buf, spec := make([]float64, size), make([]complex128, size/2+1)
	met := func(n int) bool {
		clear(buf)
		copy(buf, h[:n])
		fft.Coefficients(spec, buf)
		return grid.Met(Magnitude{
			Bin: func(k int) float64 { return math.Hypot(real(spec[k]), imag(spec[k])) },
			At:  func(omega float64) float64 { return cmplx.Abs(response.TapsAt(h[:n], omega)) },
		})
	}
	if !met(len(h)) {
		return nil, false
	}
	lo, hi := 0, len(h)
	for hi-lo > 1 {
		if mid := (lo + hi) / 2; met(mid) {
			hi = mid
		} else {
			lo = mid
		}
	}
	return h[:hi], true
}
