package figures

import (
	"math"
	"sync"

	"fettle/filter/design"
	"fettle/filter/response"

	"gonum.org/v1/gonum/dsp/fourier"
	"gonum.org/v1/gonum/floats"
)

// cutBand tells the energy of one band of a response that is cut now here, now there. The
// response is filtered with a window w that is turned to the middle f0 of the band, and
// of what comes out every M-th sample is kept:
//
//	d[m] = Σ y[n] w[n - mM] e^(-j2πf0(n - mM)/fs)
//
// Within the band, |Y(f)| is M |D(f)|/|W(f - f0)|, for what falls onto it from elsewhere
// is in the window's stopband (Crochiere and Rabiner 1983, Multirate Digital Signal
// Processing, chapter 2). A cut changes only the few d that it reaches.
type cutBand struct {
	Band
	x      []float64
	rate   float64
	from   int          // samples earlier hold too little to count
	every  int          // M
	re, im []float64    // w[i] e^(-j2πf0 i/fs)
	kept   []complex128 // d of the response that is not cut, as far as asked for so far
	d      []complex128 // those of a cut one
	y      []float64    // its last samples
	grids  *gridKeeper
}

// A window of windowSpan times M samples and this beta has its stopband, 281 dB down,
// from 0.74 of fs/M on. With M at most fs over twice the band's width, the nearest that
// falls onto the band is at 0.75.
const (
	windowSpan = 13
	windowBeta = 30.0
)

func newCutBand(b Band, x []float64, rate float64, from int, grids *gridKeeper) *cutBand {
	c := &cutBand{Band: b, x: x, rate: rate, from: from, every: 1, grids: grids}
	for rate >= 4*float64(c.every)*b.width() {
		c.every *= 2
	}
	w := cutWindow(c.every)
	c.re, c.im = make([]float64, len(w)), make([]float64, len(w))
	turns := response.NewTurns(-2*math.Pi*c.middle()/rate, 0)
	for i, v := range w {
		z := turns.Next()
		c.re[i], c.im[i] = v*real(z), v*imag(z)
	}
	return c
}

// middle is f0 in Hz.
func (c *cutBand) middle() float64 { return (c.Lower + c.Upper) / 2 }

// energy is ∫|DFT(w·x)|² df over the band, w the half-cosine step from 1 to 0, four periods
// wide, about the index centre.
func (c *cutBand) energy(centre float64) float64 {
	half := leastPeriods * c.rate / c.Centre
	to := min(int(math.Ceil(centre+half)), len(c.x))
	if to <= c.from {
		return 0
	}
	flat := min(max(int(math.Ceil(centre-half)), c.from), to)
	c.decimate(flat, to, func(n int) float64 {
		return 0.5 * (1 - math.Sin(math.Pi/2*(float64(n)-centre)/half))
	})
	return c.sum(to - c.from)
}

// decimate makes d of the samples up to to, those from flat on times step(n).
func (c *cutBand) decimate(flat, to int, step func(n int) float64) {
	whole := (flat - c.from) / c.every // d that the cut does not reach
	for len(c.kept) < whole {
		c.kept = append(c.kept, c.filtered(c.x[c.from:], c.from, len(c.kept)))
	}
	first := max(c.start(whole), c.from)
	c.y = append(c.y[:0], c.x[first:to]...)
	for n := flat; n < to; n++ {
		c.y[n-first] *= step(n)
	}
	c.d = append(c.d[:0], c.kept[:whole]...)
	for m := whole; c.start(m) < to; m++ {
		c.d = append(c.d, c.filtered(c.y, first, m))
	}
}

// start is the first sample that d[m] sees; d[0] is the first that sees one that counts.
func (c *cutBand) start(m int) int { return c.from + (m+1)*c.every - len(c.re) }

// filtered is d[m] of samples that begin at an index, with silence about them.
func (c *cutBand) filtered(y []float64, begin, m int) complex128 {
	start := c.start(m)
	lo, hi := max(start, begin), min(start+len(c.re), begin+len(y))
	seen := y[lo-begin : hi-begin]
	return complex(floats.Dot(seen, c.re[lo-start:hi-start]), floats.Dot(seen, c.im[lo-start:hi-start]))
}

// binsOfCut is how many bins of its transform a band must hold to be summed over.
const binsOfCut = 64

// directCost is how many samples of a transform cost as much as one product of a direct sum.
const directCost = 0.1

// sum is ∫|Y|² df over the band, by whichever road is shorter for y of so many samples.
func (c *cutBand) sum(samples int) float64 {
	seconds := float64(samples) / c.rate
	points := 32 + math.Pi*c.width()*seconds
	// A transform no longer than y wraps its autocorrelation; what wraps is the product of
	// its two faded ends, so the sum over 64 bins or more does not see it.
	size := fastLength(max(samples, int(binsOfCut*c.rate/c.width())))
	if directCost*points*float64(samples) < float64(size) {
		return c.sumDirectly(seconds)
	}
	return c.sumOverBins(size)
}

func (c *cutBand) sumDirectly(seconds float64) float64 {
	hz, width := legendre(c.Band, seconds)
	var e float64
	for i, f := range hz {
		turns := response.NewTurns(-2*math.Pi*f/c.rate*float64(c.every), 0)
		var h complex128
		for _, v := range c.d {
			h += v * turns.Next()
		}
		e += width[i] * c.unfiltered(f) * power(h)
	}
	return e
}

// sumOverBins is over those of a transform of size points. They are bins of the shorter one
// of d, which is folded where it is too long.
func (c *cutBand) sumOverBins(size int) float64 {
	g := c.grids.grid(size / c.every)
	clear(g.bins)
	for m, v := range c.d {
		g.bins[m%len(g.bins)] += v
	}
	g.fft.Coefficients(g.bins, g.bins)
	step := c.rate / float64(size)
	var e float64
	response.EachBin(step, c.Lower, c.Upper, func(k int, width float64) {
		e += width * c.unfiltered(float64(k)*step) * power(g.bins[k%len(g.bins)])
	})
	return e
}

// unfiltered is (M/|W(f - f0)|)², by which |D|² becomes |Y|². With x = π (f - f0)·length/fs,
//
//	W = length/I0(β) · sinh √(β² - x²)/√(β² - x²)
//
// (Kaiser 1974); the samples of the window, with half weight at its ends, sum up to that integral.
func (c *cutBand) unfiltered(f float64) float64 {
	x := math.Pi * (f - c.middle()) * windowSpan * float64(c.every) / c.rate
	root := math.Sqrt(windowBeta*windowBeta - x*x)
	atEnd := 2 * math.Hypot(c.re[0], c.im[0]) // 1/I0(β)
	w := windowSpan * atEnd * math.Sinh(root) / root
	return 1 / (w * w)
}

// cutWindows are those made so far: the longest takes some milliseconds.
var cutWindows sync.Map // by M

// cutWindow is the window for a response of which every so many samples are kept.
func cutWindow(every int) []float64 {
	if made, ok := cutWindows.Load(every); ok {
		return made.([]float64)
	}
	w := design.KaiserWindow(windowSpan*every+1, windowBeta)
	w[0] /= 2
	w[len(w)-1] /= 2
	cutWindows.Store(every, w)
	return w
}

// mostKept bounds the memory for transforms to about 5 MB.
const mostKept = 1 << 16

// gridKeeper keeps transforms: bands ask for the same few sizes again and again, and to make
// one costs about as much as using it.
type gridKeeper struct {
	made map[int]*cutGrid
	kept int // points of all of these
}

// cutGrid is a transform and room for its bins.
type cutGrid struct {
	fft  *fourier.CmplxFFT
	bins []complex128
}

func newGridKeeper() *gridKeeper { return &gridKeeper{made: map[int]*cutGrid{}} }

func (k *gridKeeper) grid(points int) *cutGrid {
	if k.made[points] == nil {
		if k.kept += points; k.kept > mostKept {
			clear(k.made)
			k.kept = points
		}
		k.made[points] = &cutGrid{fourier.NewCmplxFFT(points), make([]complex128, points)}
	}
	return k.made[points]
}
