package design

import (
	"fmt"
	"math"
	"math/cmplx"

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

// manyPoints is the transform size above which only the square cut is tried:
// kernels that long belong to narrow resonances, whose tails decay as they are.
const manyPoints = 1 << 18

// LinearPhase returns the shortest odd-length symmetric kernel that the
// frequency-sampling and window method finds for a target: the zero-phase
// response of the target's Aim, cut to N taps under a Kaiser window, with N
// and the window's beta found by search. The kernel's latency is (N-1)/2.
//
// finest is the width in radians a sample of the target's narrowest feature.
// The search measures on a grid of at least 22 points to that and four to a
// ripple of the kernel. It fails with *LengthError beyond MaxTaps.
//
// Source: Rabiner and Gold 1975, ch. 3 (frequency sampling, windows).
func LinearPhase(t Target, finest float64) ([]float64, error) {
	for size := GridFor(finest); size/4 <= 2*MaxTaps; size = larger(size) {
		s := newCutSearch(t, size)
		if half, beta, ok := s.shortest(); ok && 2*half < MaxTaps {
			return s.kernel(half, beta), nil
		}
	}
	return nil, &LengthError{"linear"}
}

// GridFor is the transform size, 2^n or 3 2^n, whose points stand at least 22 to
// a feature of the given width: as many as a kernel needs that follows such a
// feature to a tolerance of 0.1 dB (its length is about 34 over the width).
func GridFor(finest float64) int {
	size := 1 << 12
	for float64(size)*finest < 22*2*math.Pi && size < 32*MaxTaps {
		size = larger(size)
	}
	return size
}

// larger is the next of the sizes 2^n and 3 2^n, for which transforms are fast.
func larger(size int) int {
	if size&(size-1) == 0 {
		return size / 2 * 3
	}
	return size / 3 * 4
}

// cutSearch looks for the shortest cut of one zero-phase response.
type cutSearch struct {
	grid *Grid
	size int
	dct  *fourier.DCT // the transform of an even sequence, at half the cost
	zero []float64    // zero-phase response: zero[n] at lags n and -n
	buf  []float64
	spec []float64
}

func newCutSearch(t Target, size int) *cutSearch {
	s := &cutSearch{size: size, dct: fourier.NewDCT(size/2 + 1), buf: make([]float64, size/2+1)}
	s.spec = make([]float64, size/2+1)
	s.grid = t.sample(size, s.spec)
	s.zero = s.dct.Transform(nil, s.spec)
	for n := range s.zero {
		s.zero[n] /= float64(size)
	}
	return s
}

// shortest finds the least half length under any window that the grid can
// judge, which has four points to a ripple.
func (s *cutSearch) shortest() (half int, beta float64, ok bool) {
	limit := s.size / 8
	if enough := negligible(s.zero, guard*s.grid.floor/2); enough < limit {
		limit = enough
	}
	best := limit + 1
	for _, b := range kaiserBetas {
		n, found := leastLength(min(best-1, limit), s.size > manyPoints, func(n int) float64 { return s.excess(n, b) })
		if found {
			best, beta, ok = n, b, true
		}
		if s.size > manyPoints || best == 0 {
			break
		}
	}
	return best, beta, ok
}

// negligible is the index from which on the sum of |h| is at most allowed: no
// spectrum changes by more than that if the rest is cut.
func negligible(h []float64, allowed float64) int {
	n, sum := len(h), 0.0
	for n > 0 {
		if sum += math.Abs(h[n-1]); sum > allowed {
			break
		}
		n--
	}
	return n
}

// leastLength finds the least n from 0 to most whose excess is within guard;
// ok is false when that of most is not. The excess falls about exponentially
// with n, so its logarithm is interpolated, every other step halving the
// bracket instead. Coarsely, the search ends at 0.2 % of the length.
func leastLength(most int, coarsely bool, excess func(n int) float64) (n int, ok bool) {
	if most < 0 {
		return 0, false
	}
	lo, hi := -1, most // lo fails, or is no length; hi is within
	atHi := excess(hi)
	if !(atHi <= guard) {
		return 0, false
	}
	atLo := math.Inf(1)
	for step := 0; ; step++ {
		resolution := 1
		if coarsely {
			resolution = max(1, hi/500)
		}
		if hi-lo <= resolution {
			return hi, true
		}
		mid := (lo + hi) / 2
		if share := math.Log(atLo/guard) / math.Log(atLo/math.Max(atHi, 1e-9)); step%2 == 1 && share > 0 && share < 1 {
			mid = min(max(lo+int(math.Ceil(share*float64(hi-lo)*1.001)), lo+1), hi-1)
		}
		if e := excess(mid); e <= guard {
			hi, atHi = mid, e
		} else {
			lo, atLo = mid, e
		}
	}
}

// excess measures the kernel of a half length under a window.
func (s *cutSearch) excess(half int, beta float64) float64 {
	clear(s.buf)
	w := newTaper(half, beta)
	for n := 0; n <= half; n++ {
		s.buf[n] = s.zero[n] * w.at(n)
	}
	s.dct.Transform(s.spec, s.buf)
	return s.grid.Excess(Magnitude{
		Bin: func(k int) float64 { return math.Abs(s.spec[k]) },
		At: func(omega float64) float64 { // both sides of the kernel from one
			return math.Abs(2*real(response.TapsAt(s.buf[:half+1], omega)) - s.buf[0])
		},
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
	for size < 4*len(h) {
		size = larger(size)
	}
	grid := t.Sample(size)
	most := min(len(h), negligible(h, guard*grid.floor))
	if most == len(h) {
		return nil, false // the end of h is still too loud to be left out unseen
	}
	fft := fourier.NewFFT(size)
	buf, spec := make([]float64, size), make([]complex128, size/2+1)
	n, ok := leastLength(most, size > manyPoints, func(n int) float64 {
		clear(buf)
		copy(buf, h[:n])
		fft.Coefficients(spec, buf)
		return grid.Excess(Magnitude{
			Bin: func(k int) float64 { return math.Hypot(real(spec[k]), imag(spec[k])) },
			At:  func(omega float64) float64 { return cmplx.Abs(response.TapsAt(h[:n], omega)) },
		})
	})
	return h[:max(n, 1)], ok
}
