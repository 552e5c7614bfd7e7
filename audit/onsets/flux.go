package onsets

import (
	"math"
	"slices"

	"gonum.org/v1/gonum/dsp/fourier"
)

const (
	// windowSeconds is the most that a window of the detection function lasts; it
	// is the largest power of two of samples within it.
	windowSeconds = 0.024
	hopSeconds    = 0.010
	// fluxBack is how many hops the frame lies back that a frame is compared with:
	// about half a window, so that the two share little.
	fluxBack = 2
	// Bands are a semitone wide, or a bin where that is wider. Rumble and the
	// lowest hum lie under them, little but hiss above.
	fluxFrom, fluxTo = 100.0, 16000.0
	bandsPerOctave   = 12
	// fluxRange is how far under the loudest band of late a band still counts, as a
	// ratio of powers; what was loudest is forgotten by 1 dB a second.
	fluxRange = 1e-6
	leastFlux = 1e-14 // a band's power, so that digital silence divides
)

// flux is the detection function: by how many decibels the bands of a spectrum
// rise from one frame to another, falls not counted, in the mean over bands.
type flux struct {
	hop      int // samples
	window   []float64
	fft      *fourier.FFT
	frame    []float64 // under the window
	spectrum []complex128
	edges    []int       // of the bands, in bins
	earlier  [][]float64 // the bands of the last fluxBack frames, the oldest first
	loudest  float64     // band's power of late
	forget   float64     // factor a hop
}

func newFlux(rate float64) *flux {
	size := 1 << int(math.Log2(max(16, windowSeconds*rate)))
	return &flux{
		hop: int(math.Round(hopSeconds * rate)), window: hann(size), fft: fourier.NewFFT(size),
		frame: make([]float64, size), spectrum: make([]complex128, size/2+1),
		edges:  bandEdges(rate, size),
		forget: math.Pow(10, -hopSeconds/10),
	}
}

// hann is a periodic Hann window that takes a sine of amplitude a to bins of
// magnitude a.
func hann(size int) []float64 {
	w := make([]float64, size)
	for n := range w {
		w[n] = 2 / float64(size) * (1 - math.Cos(2*math.Pi*float64(n)/float64(size)))
	}
	return w
}

// bandEdges gives the first bin of each band and the one past the last.
func bandEdges(rate float64, size int) []int {
	hz := rate / float64(size)
	top := min(fluxTo, 0.45*rate)
	edges := []int{int(math.Ceil(fluxFrom / hz))}
	for last := edges[0]; float64(last)*hz < top; edges = append(edges, last) {
		next := int(math.Round(float64(last) * math.Pow(2, 1.0/bandsPerOctave)))
		last = max(last+1, next)
	}
	return edges
}

// next takes the frame that f.frame holds and returns its flux in dB, 0 for the
// first ones.
func (f *flux) next() float64 {
	for n, w := range f.window {
		f.frame[n] *= w
	}
	f.fft.Coefficients(f.spectrum, f.frame)
	now := make([]float64, 0, len(f.edges)-1)
	for i, from := range f.edges[:len(f.edges)-1] {
		now = append(now, power(f.spectrum[from:f.edges[i+1]]))
	}
	f.loudest = max(f.loudest*f.forget, slices.Max(now))
	f.earlier = append(f.earlier, now)
	if len(f.earlier) <= fluxBack {
		return 0
	}
	before := f.earlier[0]
	f.earlier = f.earlier[1:]
	return rises(now, before, max(leastFlux, fluxRange*f.loudest))
}

func power(spectrum []complex128) float64 {
	var sum float64
	for _, c := range spectrum {
		sum += real(c)*real(c) + imag(c)*imag(c)
	}
	return sum
}

// rises is the mean over bands of what each is up, in dB, on the largest of the
// earlier frame's band and its two neighbours, so that a partial that glides into
// the next band is no rise. Both are on top of the floor.
func rises(now, before []float64, floor float64) float64 {
	var sum float64
	last := len(before) - 1
	for i, p := range now {
		most := max(before[i], before[max(i-1, 0)], before[min(i+1, last)])
		if p > most {
			sum += math.Log10((p + floor) / (most + floor))
		}
	}
	return 10 * sum / float64(len(now))
}
