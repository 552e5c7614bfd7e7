package response

import (
	"maps"
	"math"
	"math/cmplx"
	"slices"
)

// mirrorTolerance is how far mirrored taps may differ, as a fraction of the largest.
const mirrorTolerance = 1e-12

// BulkLatency is the one delay that stands for the whole response h: in samples
// after index origin, fractional and possibly negative. rate is in Hz.
//
// For a kernel that is symmetric or antisymmetric to 1e-12 of its largest tap it is
// exactly the middle, (N-1)/2 of the taps that are not zero. Otherwise it is the lag t
// that maximises |∫ H(f)/f·e^(j2πft) df| over 20 Hz to 0.45 fs, one-sided: the
// envelope of the correlation with pink noise. polarity is the sign of the real
// part of that integral there, or 0, not stated, unless its modulus is at least
// 0.75 of ∫|H|/f df and its angle within 45° of 0° or 180°.
//
// A response without energy, or one that is not finite, has NaN and 0.
func BulkLatency(h []float64, origin int, rate float64) (d float64, polarity int) {
	if !usable(h, rate) {
		return math.NaN(), 0
	}
	h = h[:audibleLength(h)]
	size := NextPow2(max(4*len(h), int(bulkDensity*rate)))
	t, polarity := BulkLatencyOf(h, Spectrum(h, size), size, rate)
	return t - float64(origin), polarity
}

// audibleLength leaves out an end whose energy is 1e-24 of the whole: it moves
// a latency by far less than a millionth of a sample, and costs what it is long.
func audibleLength(h []float64) int {
	var total, end float64
	for _, v := range h {
		total += v * v
	}
	n := len(h)
	for n > 1 {
		if end += h[n-1] * h[n-1]; end > 1e-24*total {
			break
		}
		n--
	}
	return n
}

// BulkDelay is BulkLatency from the first sample of h, without its polarity:
// for a symmetric kernel, which is known by looking at it, much cheaper.
func BulkDelay(h []float64, rate float64) float64 {
	if usable(h, rate) {
		if middle, ok := Mirror(h); ok {
			return middle
		}
	}
	d, _ := BulkLatency(h, 0, rate)
	return d
}

func usable(h []float64, rate float64) bool {
	energy := 0.0
	for _, v := range h {
		energy += v * v
	}
	return energy > 0 && !math.IsInf(energy, 1) && rate*TopOfBand > PinkFrom
}

// bulkDensity is how many bins stand in one Hz: 1/f at 20 Hz is smooth over
// several, however short the response.
const bulkDensity = 10

// BulkLatencyOf is BulkLatency, relative to the first sample of x, for a caller
// that has the transform of x already: bins 0 to size/2, with size a multiple
// of 4 and at least 4 times len(x), and ten bins or more a Hz.
func BulkLatencyOf(x []float64, bins []complex128, size int, rate float64) (t float64, polarity int) {
	c := pinkCorrelation(bins, size, rate)
	t, symmetric := Mirror(x)
	if !symmetric {
		t = c.largest(max(2*len(x), int(bulkDensity*rate/2)))
	}
	return t, c.polarity(t)
}

// Mirror is the index about which x is symmetric or antisymmetric, if it is.
// Only the energy's centroid can be that index.
func Mirror(x []float64) (centre float64, ok bool) {
	var energy, moment, largest float64
	for n, v := range x {
		energy += v * v
		moment += float64(n) * v * v
		largest = max(largest, math.Abs(v))
	}
	twice := int(math.Round(2 * moment / energy))
	even, odd := true, true
	for n, v := range x {
		var twin float64
		if m := twice - n; m >= 0 && m < len(x) {
			twin = x[m]
		}
		even = even && math.Abs(v-twin) <= mirrorTolerance*largest
		odd = odd && math.Abs(v+twin) <= mirrorTolerance*largest
	}
	return float64(twice) / 2, even || odd
}

// correlation is H(f)/f df over the pink range: the one-sided spectrum of the
// correlation with pink noise.
type correlation struct {
	bins  []complex128 // DFT(h), all of it
	size  int          // K
	pink  Quadrature
	total float64 // ∫|H|/f df
}

func pinkCorrelation(bins []complex128, size int, rate float64) *correlation {
	c := &correlation{bins: bins, size: size, pink: PinkQuadrature(rate/float64(size), rate)}
	for k := c.pink.First; k <= c.pink.Last; k++ {
		c.total += cmplx.Abs(c.weighted(k))
	}
	return c
}

// weighted is H(f)/f df at bin k.
func (c *correlation) weighted(k int) complex128 { return c.bins[k] * complex(c.pink.Pink(k), 0) }

// at is the integral at a lag of t samples, and its first two derivatives by t.
func (c *correlation) at(t float64) (a0, a1, a2 complex128) {
	unit := 2 * math.Pi / float64(c.size)
	rotation := turn(unit * t)
	for from := c.pink.First; from <= c.pink.Last; from += resync {
		z := turn(unit * t * float64(from))
		w := unit * float64(from)
		for k := from; k <= min(from+resync-1, c.pink.Last); k++ {
			v := c.weighted(k) * z
			a0 += v
			a1 += complex(-w*imag(v), w*real(v))
			a2 -= complex(w*w*real(v), w*w*imag(v))
			w += unit
			z *= rotation
		}
	}
	return a0, a1, a2
}

// slope is the first and second derivative by t of the squared modulus, and the square itself.
func (c *correlation) slope(t float64) (f, f1, f2 float64) {
	a0, a1, a2 := c.at(t)
	f1 = 2 * real(cmplx.Conj(a0)*a1)
	f2 = 2*power(a1) + 2*real(cmplx.Conj(a0)*a2)
	return power(a0), f1, f2
}

// contender is how near a coarse maximum must come to the largest to be refined:
// on whole samples a maximum up to 0.45 fs is seen at worst 8 % low.
const contender = 0.9

// largest is the lag of the largest modulus: every coarse maximum that could be it, refined.
// Coarse ones are looked for at n whole lags about 0, at least as many as given.
func (c *correlation) largest(atLeast int) float64 {
	stride := 1 // between the bins that hold so many lags
	for c.size%(4*stride) == 0 && c.size/(2*stride) >= atLeast {
		stride *= 2
	}
	n := c.size / stride
	coarse := c.contenders(stride)
	best, bestValue := 0.0, -1.0
	for _, i := range slices.Sorted(maps.Keys(coarse)) {
		if p := coarse[i]; p < coarse[(i+n-1)%n] || p < coarse[(i+1)%n] {
			continue
		}
		lag := i
		if i > n/2 {
			lag -= n
		}
		if t, value := c.climb(float64(lag)); value > bestValue {
			best, bestValue = t, value
		}
	}
	return best
}

// contenders is the squared modulus at the whole lags where it comes near enough to the
// largest, from every stride-th bin; those below 0 stand at the end of K/stride.
func (c *correlation) contenders(stride int) map[int]float64 {
	n := c.size / stride
	re, im := make([]float64, c.pink.Last/stride+1), make([]float64, c.pink.Last/stride+1)
	for i := (c.pink.First + stride - 1) / stride; i < len(re); i++ {
		v := c.weighted(i * stride)
		re[i], im[i] = real(v), imag(v)
	}
	near := nearLargest{squares: map[int]float64{}}
	NewTransform(n, len(re)).Each(func(k int, v []complex128) {
		turned := complex(-imag(v[1]), real(v[1]))
		near.see((n-k)%n, power(v[0]+turned))
		near.see(k, power(v[0]-turned)) // the conjugate of what stands at -k
	}, Sequence{X: re}, Sequence{X: im})
	near.drop()
	return near.squares
}

// nearLargest keeps squares, by index, of contenders for the largest of a long list.
type nearLargest struct {
	squares map[int]float64
	top     float64
	enough  int // to look for squares to be dropped
}

func (n *nearLargest) see(i int, square float64) {
	if square < contender*contender*n.top {
		return
	}
	n.squares[i], n.top = square, max(n.top, square)
	if len(n.squares) > n.enough {
		n.drop()
		n.enough = 2*len(n.squares) + 1024
	}
}

func (n *nearLargest) drop() {
	maps.DeleteFunc(n.squares, func(_ int, square float64) bool { return square < contender*contender*n.top })
}

// climb finds the maximum within a sample of t: Newton steps, kept inside a
// bracket that shrinks by the sign of the slope.
func (c *correlation) climb(t float64) (at, value float64) {
	lo, hi := t-1, t+1
	for range 60 {
		f, f1, f2 := c.slope(t)
		if f1 > 0 {
			lo = t
		} else {
			hi = t
		}
		next := t - f1/f2
		if !(f2 < 0 && next > lo && next < hi) {
			next = (lo + hi) / 2
		}
		moved := math.Abs(next - t)
		at, value, t = t, f, next
		if moved < 1e-11*(1+math.Abs(t)) {
			break
		}
	}
	return at, value
}

// polarity is the sign of the correlation at lag t, 0 when it is not clear enough to state.
func (c *correlation) polarity(t float64) int {
	a, _, _ := c.at(t)
	const half = math.Sqrt2 / 2 // cos 45°
	switch modulus := cmplx.Abs(a); {
	case !(modulus >= 0.75*c.total), math.Abs(real(a)) < half*modulus:
		return 0
	case real(a) < 0:
		return -1
	}
	return 1
}

// power is |c|^2 without the square root of cmplx.Abs.
func power(c complex128) float64 { return real(c)*real(c) + imag(c)*imag(c) }

// turn is e^(jx).
func turn(x float64) complex128 { return cmplx.Rect(1, x) }
