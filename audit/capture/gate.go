package capture

import (
	"math"

	"fettle/filter/response"

	"gonum.org/v1/gonum/dsp/fourier"
)

// gates cut a response octave by octave, each to where it stands above noise. The
// octaves overlap and sum to 1.
type gates struct {
	fft     *fourier.FFT
	edges   []float64 // Hz, between octaves
	rate    float64
	shares  [][]float64 // how much of each bin belongs to an octave
	windows []window    // an octave's each
	// from, to are what apply looks at, fades at both ends included.
	from, to, fadeIn, fadeOut int
}

// window is 1 from first to last and fades out over fade samples on either side.
type window struct{ first, last, fade int }

const (
	lowestEdge = 90.0 // Hz; what is below is one octave too
	// overlap is the standard deviation, in octaves, of the normal distribution that
	// leads from one octave to the next: its pulse is 160 dB down after ten periods.
	overlap = 0.15
	periods = 10.0
	// prominent is how far, as a ratio, a block of four periods stands above the
	// noise when it is response: chi-squared with eight degrees of freedom exceeds
	// six times its mean once in ten million cases.
	blockPeriods = 4.0
	prominent    = 6.0
	// quiet is the least energy of a sample, relative to the whole response's, that
	// counts as response: rounding is below.
	quiet = 1e-24
)

// newGates looks at a mean response. density is the energy of its noise per sample
// and Hz of the one-sided spectrum; peak is its largest sample.
func newGates(mean []float64, peak int, rate float64, density func(hz float64) float64) *gates {
	g := &gates{rate: rate}
	for f := lowestEdge; f < 0.35*rate; f *= 2 {
		g.edges = append(g.edges, f)
	}
	var energy float64
	for _, v := range mean {
		energy += v * v
	}
	g.setTransform(len(mean))
	bins := g.transform(mean)
	for b := 0; b <= len(g.edges); b++ {
		noise := g.noise(b, density)
		x := g.octave(bins, b)[:len(mean)]
		g.windows = append(g.windows, g.windowOf(x, b, peak, prominent*noise+quiet*energy))
	}
	g.narrow(len(mean))
	return g
}

// setTransform makes ready for sequences of a length.
func (g *gates) setTransform(length int) {
	g.fft = fourier.NewFFT(response.NextPow2(length))
	g.shares = nil
	for b := 0; b <= len(g.edges); b++ {
		share := make([]float64, g.fft.Len()/2+1)
		for k := range share {
			share[k] = g.share(b, g.hertz(k))
		}
		g.shares = append(g.shares, share)
	}
}

func (g *gates) transform(x []float64) []complex128 {
	padded := make([]float64, g.fft.Len())
	copy(padded, x)
	return g.fft.Coefficients(nil, padded)
}

// share is how much of a frequency belongs to octave b.
func (g *gates) share(b int, hz float64) float64 {
	above := func(edge int) float64 { // the share above an edge
		if edge < 0 {
			return 1
		}
		if edge == len(g.edges) || hz == 0 {
			return 0
		}
		return 0.5 * math.Erfc(-math.Log2(hz/g.edges[edge])/overlap/math.Sqrt2)
	}
	return above(b-1) - above(b)
}

// octave is the sequence of octave b.
func (g *gates) octave(bins []complex128, b int) []float64 {
	part := make([]complex128, len(bins))
	for k, v := range bins {
		part[k] = v * complex(g.shares[b][k]/float64(g.fft.Len()), 0)
	}
	return g.fft.Sequence(nil, part)
}

func (g *gates) hertz(k int) float64 { return float64(k) / float64(g.fft.Len()) * g.rate }

// noise is the energy per sample of the noise in octave b.
func (g *gates) noise(b int, density func(hz float64) float64) float64 {
	var sum float64
	const steps = 64
	lo, hi := g.span(b)
	for i := range steps {
		f := lo * math.Pow(hi/lo, (float64(i)+0.5)/steps)
		s := g.share(b, f)
		sum += s * s * density(f) * f * math.Log(hi/lo) / steps
	}
	return sum
}

// span is an octave with its overlaps, Hz.
func (g *gates) span(b int) (lo, hi float64) {
	lo, hi = 10, g.rate/2
	if b > 0 {
		lo = g.edges[b-1] / math.Sqrt2
	}
	if b < len(g.edges) {
		hi = min(hi, g.edges[b]*math.Sqrt2)
	}
	return lo, hi
}

// period is the longest period of an octave in samples.
func (g *gates) period(b int) float64 {
	return g.rate / g.edges[max(b-1, 0)]
}

// windowOf finds where an octave's response stands above a level, and takes twice
// that.
func (g *gates) windowOf(x []float64, b, peak int, level float64) window {
	block := int(math.Ceil(blockPeriods * g.period(b)))
	first, last := peak, peak
	for from := 0; from+block <= len(x); from += block {
		var energy float64
		for _, v := range x[from : from+block] {
			energy += v * v
		}
		if energy > level*float64(block) {
			first, last = min(first, from), max(last, from+block)
		}
	}
	margin := int(periods * g.period(b))
	return window{
		first: peak - 2*(peak-first) - margin,
		last:  peak + 2*(last-peak) + margin,
		fade:  margin,
	}
}

// at is the window's value at an index.
func (w window) at(i int) float64 {
	switch {
	case i < w.first:
		return smooth(1 - float64(w.first-i)/float64(w.fade+1))
	case i > w.last:
		return smooth(1 - float64(i-w.last)/float64(w.fade+1))
	}
	return 1
}

// apply cuts a response of the length that newGates saw.
func (g *gates) apply(x []float64) []float64 {
	bins := g.transform(faded(x[g.from:g.to], g.fadeIn, g.fadeOut))
	out := make([]float64, len(x))
	for b, w := range g.windows {
		part := g.octave(bins, b)
		for i := max(w.first-w.fade, g.from); i < min(w.last+w.fade+1, g.to); i++ {
			out[i] += part[i-g.from] * w.at(i)
		}
	}
	return out
}

// narrow keeps later transforms to what the windows leave, and a fade on either side.
func (g *gates) narrow(length int) {
	margin := int(periods * g.period(0))
	from, to := g.extent(length)
	g.from, g.to = max(from-margin, 0), min(to+margin, length)
	g.fadeIn, g.fadeOut = from-g.from, g.to-to
	g.setTransform(g.to - g.from)
}

// lengths are Σ w² ahead of the peak and behind it, in samples, in octave b.
func (g *gates) lengths(b, peak, length int) (ahead, behind float64) {
	for i := range length {
		v := g.windows[b].at(i)
		if i < peak {
			ahead += v * v
		} else {
			behind += v * v
		}
	}
	return ahead, behind
}

// octaveOf is the octave that most of a frequency belongs to.
func (g *gates) octaveOf(hz float64) int {
	b := 0
	for b < len(g.edges) && hz > g.edges[b] {
		b++
	}
	return b
}

// extent is where the windows leave anything.
func (g *gates) extent(length int) (from, to int) {
	from, to = length, 0
	for _, w := range g.windows {
		from, to = min(from, w.first-w.fade), max(to, w.last+w.fade+1)
	}
	return max(from, 0), min(to, length)
}
