package capture

import (
	"math"
	"math/cmplx"

	"fettle/audit/estimate"
	"fettle/audit/probe"

	"gonum.org/v1/gonum/dsp/fourier"
)

// deconvolver turns the repeats of a capture into responses. Index 0 of all its
// sequences is where a device without delay other than start would answer;
// negative times stand at the end.
type deconvolver struct {
	p       probe.Parameters
	stretch float64 // samples of the capture to one of the probe
	start   int     // of the first repeat, by its peak
	repeats int
	before  int // frames of a repeat's stretch ahead of its start
	length  int // frames of the stretch
	early   int // frames that the linear response may begin ahead of index 0
	late    int // frames that it may last after it
	ahead   int // frames ahead of index 0 that matter: early, or products of distortion
	fft     *fourier.FFT
	x       []complex128 // transform of one repeat
	outside []float64    // 0 inside the probe's band, 1 where nothing can be measured
}

// ends keep a stretch's tail apart from what comes next.
const (
	longestLate  = 4.0  // s
	longestEarly = 1.0  // s
	breathing    = 0.25 // of the pause, ahead of a repeat
)

func newDeconvolver(p probe.Parameters, stretch float64, start, repeats int) *deconvolver {
	rate := float64(p.Rate)
	pause := p.Period - p.Signal
	d := &deconvolver{p: p, stretch: stretch, start: start, repeats: repeats}
	d.before = int(breathing * float64(pause))
	d.length = int(float64(p.Period) * stretch)
	d.early = min(d.before, int(longestEarly*rate))
	if p.Kind == probe.Chirp {
		d.early = int(min(p.OrderLead(orderSplit(1))*stretch, longestEarly*rate))
	}
	d.late = min(pause-d.before, int(longestLate*rate))
	d.ahead = max(d.early, int(p.OrderLead(orderSplit(ordersOf))*stretch))
	size := fastSize(d.length + d.ahead)
	d.fft = fourier.NewFFT(size)
	padded := make([]float64, size)
	copy(padded, p.Once(stretch))
	d.x = d.fft.Coefficients(nil, padded)
	d.outside = make([]float64, len(d.x))
	for k := range d.outside {
		d.outside[k] = p.Unmeasured(d.hertz(k))
	}
	return d
}

// worker is d with a transform of its own, for one goroutine.
func (d *deconvolver) worker() *deconvolver {
	w := *d
	w.fft = fourier.NewFFT(d.size())
	return &w
}

func (d *deconvolver) size() int { return d.fft.Len() }

func (d *deconvolver) hertz(k int) float64 {
	return float64(k) / float64(d.size()) * float64(d.p.Rate)
}

// fastSize is the least 2^k, 5·2^k or 3·2^k that is at least n: lengths with fast
// transforms.
func fastSize(n int) int {
	for size := 8; ; size *= 2 {
		for _, s := range []int{size, size / 4 * 5, size / 2 * 3} {
			if s >= n {
				return s
			}
		}
	}
}

// quotient is repeat r of a channel over the probe, where it can be measured.
func (d *deconvolver) quotient(y []float64, r int) []complex128 {
	at := float64(d.start) + float64(r*d.p.Period)*d.stretch
	whole := math.Floor(at)
	from := int(whole) - d.before
	padded := make([]float64, d.size())
	for i := range d.length {
		if n := from + i; n >= 0 && n < len(y) {
			padded[i] = y[n]
		}
	}
	q := d.fft.Coefficients(nil, padded)
	advance := at - whole + float64(d.before)
	step := 2 * math.Pi / float64(d.size())
	for k, v := range q {
		if share := 1 - d.outside[k]; share > 0 {
			q[k] = v / d.x[k] * cmplx.Rect(share, step*float64(k)*advance)
		} else {
			q[k] = 0
		}
	}
	return q
}

// sequence is the response whose transform is given, and destroys it.
func (d *deconvolver) sequence(bins []complex128) []float64 {
	h := d.fft.Sequence(nil, bins)
	for i := range h {
		h[i] /= float64(d.size())
	}
	return h
}

// continueFrom finds what the response is taken for outside the probe's band. The values at the band's edges are read
// off the region, free of distortion and most noise; but as long as the response
// stops at the edges, what is cut off the region falsifies them. Each round leaves a
// fraction of the error of the one before: the less, the longer the region.
//
// raw is the region before anything is added to it. other is read further inside the
// band: how far figures differ under the two tells how much they rest on what was not measured.
func (d *deconvolver) continueFrom(mean []complex128) (more, other []complex128, raw []float64) {
	more = make([]complex128, len(mean))
	for range 16 {
		bins := make([]complex128, len(mean))
		for k, v := range mean {
			bins[k] = v + more[k]
		}
		region := d.region(d.sequence(bins))
		if raw == nil {
			raw = region
		}
		if d.p.Kind == probe.Impulse {
			return more, more, raw
		}
		clean, peak := d.fft.Coefficients(nil, d.full(region)), peakOf(region)-d.early
		last := more
		more = d.continuation(clean, peak, 1)
		other = d.continuation(clean, peak, furtherIn)
		if apart(more, last) < 1e-8 {
			break
		}
	}
	return more, other, raw
}

// apart is the largest difference of two spectra over the largest value of the first.
func apart(a, b []complex128) float64 {
	var off, most float64
	for k, v := range a {
		off = max(off, estimate.Power(v-b[k]))
		most = max(most, estimate.Power(v))
	}
	return math.Sqrt(off / most)
}

// continuation is what the response is taken for outside the probe's band. Towards
// 0 Hz and towards half the rate its magnitude goes on as the power of the distance
// from there that it follows at the band's edge, read over a quarter of an octave;
// its phase relative to the peak (at index 0, nearly) goes straight to the nearest that
// a real response of that power can end with: whole multiples of 180 degrees, and 90
// more for an odd power. bins is a clean response on the full grid. The edges are read
// further times as far from 0 Hz and from half the rate as they are, if they are near it.
func (d *deconvolver) continuation(bins []complex128, peak int, further float64) []complex128 {
	const quarter = 1.189 // of an octave
	top := float64(d.p.Rate) / 2
	from, to := d.p.From*further, max(top-(top-d.p.To)*further, d.p.To/further)
	low := d.edgeOf(bins, peak, from, from*quarter, 0)
	high := d.edgeOf(bins, peak, to, to/quarter, top)
	c := make([]complex128, len(bins))
	turn := -2 * math.Pi / float64(d.size()) * float64(peak)
	for k, share := range d.outside {
		if share == 0 {
			continue
		}
		f := d.hertz(k)
		e := low
		if f > d.p.From {
			e = high
		}
		c[k] = e.at(f) * cmplx.Rect(share, turn*float64(k))
	}
	return c
}

const (
	// furtherIn is a third of an octave: with high-passes from 15 Hz up and low-passes up to
	// 0.45 of the rate, figures are off by a third or so of what they differ by then. A quarter
	// of an octave is as much as they are off by; what turns the phase only, beyond the band,
	// no reading can tell.
	furtherIn  = 1.26
	leastPower = 0.25 // less is a response that stays
	mostPower  = 8.0
)

// edge is one of the probe's band and what lies beyond it, up to end.
type edge struct {
	hz, end          float64
	magnitude, power float64
	phase, endPhase  float64
}

// edgeOf reads an edge off a response, with the slope towards a frequency inside.
func (d *deconvolver) edgeOf(bins []complex128, peak int, hz, inside, end float64) edge {
	hz, at := d.at(bins, hz, peak)
	inside, within := d.at(bins, inside, peak)
	e := edge{hz: hz, end: end, magnitude: cmplx.Abs(at), phase: cmplx.Phase(at)}
	power := math.Log(cmplx.Abs(within)/e.magnitude) / math.Log((inside-end)/(hz-end))
	if power > leastPower { // and no NaN
		e.power = min(power, mostPower)
	}
	odd := math.Mod(math.Round(e.power), 2) * math.Pi / 2
	e.endPhase = odd + math.Pi*math.Round((e.phase-odd)/math.Pi)
	return e
}

// at is the response beyond the edge; inside the band it stays what it is at the edge.
func (e edge) at(hz float64) complex128 {
	along := max((hz-e.end)/(e.hz-e.end), 0)
	return cmplx.Rect(e.magnitude*math.Pow(along, e.power), e.endPhase+(e.phase-e.endPhase)*along)
}

// at is the response at the bin nearest to a frequency, and that bin's own frequency, as
// if the response's peak stood at index 0.
func (d *deconvolver) at(bins []complex128, hz float64, peak int) (own float64, h complex128) {
	k := int(math.Round(hz / float64(d.p.Rate) * float64(d.size())))
	return d.hertz(k), bins[k] * cmplx.Rect(1, 2*math.Pi/float64(d.size())*float64(k)*float64(peak))
}

// region is the linear response cut out of a full sequence; index early is the
// sequence's index 0.
func (d *deconvolver) region(h []float64) []float64 {
	x := append(append([]float64(nil), h[len(h)-d.early:]...), h[:d.late]...)
	return faded(x, d.early/10, d.late/10)
}

// full puts a region back to where it was cut out.
func (d *deconvolver) full(x []float64) []float64 {
	h := make([]float64, d.size())
	for i, v := range x {
		h[(i-d.early+len(h))%len(h)] = v
	}
	return h
}
