package page

import (
	"fmt"
	"math"
	"math/cmplx"
	"slices"

	"gonum.org/v1/gonum/dsp/fourier"
	"gonum.org/v1/plot"
)

const (
	// drawnEnergy and shownEnergy are the shares of all energy that may lie
	// outside impulse and step responses and outside the energy view.
	drawnEnergy = 1e-4
	shownEnergy = 1e-6

	readings = 400 // in the table of a response
	columns  = 440 // of a curve with more samples than can be told apart
	steps    = 240 // of the energy view
	floorDB  = -80 // of the energy view
	leastMS  = 0.5 // shown before and after the aligned instant
)

const (
	impulseResponse = "impulse response"
	stepResponse    = "step response"
)

// inTime has the plots over time of the subjects whose response is known.
func inTime(subjects []Subject) []*chart {
	var known []Subject
	for _, s := range subjects {
		if len(s.Response) > 0 {
			known = append(known, s)
		}
	}
	if known == nil {
		return nil
	}
	a := timeAxis(known, drawnEnergy)
	top := [2][2]float64{}
	var out []*chart
	for i, s := range known {
		for k, r := range []*chart{
			response(s, a, penOf(i), impulseResponse, s.Response),
			response(s, a, penOf(i), stepResponse, sums(s.Response)),
		} {
			name := [...]string{"impulse", "step"}[k]
			title := [...]string{"Impulse response", "Step response"}[k]
			r.name, r.title = numbered(name, known, i), title+label(known, i)
			top[k][0], top[k][1] = min(top[k][0], r.y.min), max(top[k][1], r.y.max)
			out = append(out, r)
		}
	}
	for k, c := range out { // on one scale, to be compared
		c.y.min, c.y.max = roundedRange(1.05*top[k%2][0], 1.05*top[k%2][1])
	}
	return append([]*chart{energy(known)}, out...)
}

func sums(x []float64) []float64 {
	out := make([]float64, len(x))
	var sum float64
	for i, v := range x {
		sum += v
		out[i] = sum
	}
	return out
}

// timeAxis is relative to the aligned instant; all but a share of every
// response's energy lies on it.
func timeAxis(subjects []Subject, share float64) axis {
	a := axis{label: "time after the aligned instant, ms", min: -leastMS, max: leastMS}
	for _, s := range subjects {
		first, last := holding(s.Response, share)
		a.min = min(a.min, s.ms(first))
		a.max = max(a.max, s.ms(last))
	}
	margin := 0.08 * (a.max - a.min)
	a.min, a.max = roundedRange(a.min-margin, a.max+margin)
	return a
}

// ms is when a sample of the response stands after the aligned instant.
func (s Subject) ms(sample int) float64 { return float64(sample-s.Origin) / s.Rate * toMS }

// holding are the samples outside of which a share of the energy lies, half of
// it on either side at most.
func holding(x []float64, share float64) (first, last int) {
	var total float64
	for _, v := range x {
		total += v * v
	}
	last = len(x) - 1
	for e := 0.0; first < last; first++ {
		if e += x[first] * x[first]; e > share/2*total {
			break
		}
	}
	for e := 0.0; last > first; last-- {
		if e += x[last] * x[last]; e > share/2*total {
			break
		}
	}
	return first, last
}

// response draws samples over time.
func response(s Subject, a axis, p pen, what string, samples []float64) *chart {
	c := &chart{x: a, columns: []column{{"time", "ms", 4}, {what, "", 6}}}
	c.y.label = what + ", input = 1"
	c.keys = []key{{text: s.Label}}
	var at, value []float64
	first := int(math.Ceil(a.min/toMS*s.Rate)) + s.Origin
	last := int(math.Floor(a.max/toMS*s.Rate)) + s.Origin
	for n := first; n <= last; n++ {
		v := 0.0
		switch {
		case n >= len(samples) && what == stepResponse:
			v = samples[len(samples)-1]
		case n >= 0 && n < len(samples):
			v = samples[n]
		}
		at, value = append(at, s.ms(n)), append(value, v)
	}
	stride := 1 + len(at)/readings
	c.note = "The input's impulse or step stands at 0."
	if stride > 1 {
		c.note += fmt.Sprintf(" The table has one sample in %d.", stride)
	}
	for i := (s.Origin - first) % stride; i < len(at); i += stride { // so that 0 is among them
		c.rows = append(c.rows, row{at[i], []cell{exact(at[i]), exact(value[i])}})
	}
	c.y.min, c.y.max = min(0, slices.Min(value)), max(0, slices.Max(value))
	x, y := thinned(at, value)
	p.width, p.dash = 1.2, nil
	c.keys[0].pen = p
	c.marks = []plot.Plotter{c.zero(), c.instant()}
	if what == impulseResponse {
		c.enlarge(x, y)
	}
	c.marks = append(c.marks, curve{x, y, p})
	return c
}

// enlarge draws a curve again with what lies aside from its peak, larger by a power
// of ten, but no higher than half the peak. Where there is nothing to enlarge it
// draws nothing.
func (c *chart) enlarge(x, y []float64) {
	const aside = 0.5 // ms
	peak, least, most := 0, 0.0, 0.0
	for i, v := range y {
		if math.Abs(v) > math.Abs(y[peak]) {
			peak = i
		}
	}
	larger := make([]float64, len(y))
	for i, v := range y {
		larger[i] = math.NaN()
		if math.Abs(x[i]-x[peak]) > aside {
			larger[i], least, most = v, min(least, v), max(most, v)
		}
	}
	by := math.Pow(10, math.Floor(math.Log10(math.Abs(y[peak])/2/max(-least, most))))
	if !(by > 1) || math.IsInf(by, 0) {
		return
	}
	for i := range larger {
		larger[i] *= by
	}
	thin := pen{ink: ghost, width: 0.9}
	c.marks = append(c.marks, curve{x, larger, thin})
	c.keys = append(c.keys, key{text: fmt.Sprintf("the same, %g times larger, but for its peak", by), pen: thin})
	c.y.min, c.y.max = min(c.y.min, by*least), max(c.y.max, by*most)
}

// instant is a line at the aligned instant.
func (c *chart) instant() plot.Plotter {
	return segments{[]segment{{0, -1e9, 0, 1e9}}, zeroLine}
}

// thinned keeps the least and the greatest of each column of a curve that has
// more samples than columns.
func thinned(x, y []float64) (tx, ty []float64) {
	if len(x) <= 2*columns {
		return x, y
	}
	for k := range columns {
		from, to := k*len(x)/columns, (k+1)*len(x)/columns
		lo, hi := from, from
		for i := from; i < to; i++ {
			if y[i] < y[lo] {
				lo = i
			}
			if y[i] > y[hi] {
				hi = i
			}
		}
		tx = append(tx, x[min(lo, hi)], x[max(lo, hi)])
		ty = append(ty, y[min(lo, hi)], y[max(lo, hi)])
	}
	return tx, ty
}

// energy draws the energy-time curves, each under its own maximum, and that of
// an identity: what the view itself adds.
func energy(subjects []Subject) *chart {
	c := &chart{name: "energy", title: "Energy before and after the arrival", x: timeAxis(subjects, shownEnergy)}
	c.y = axis{label: "energy, dB under its maximum", min: floorDB, max: 5}
	// Two samples at least: an identity's curve is zero at every other.
	step := max((c.x.max-c.x.min)/steps, 2/slices.Min(ratesOf(subjects))*toMS)
	count := int((c.x.max - c.x.min) / step)
	times := make([]float64, count)
	for k := range times {
		times[k] = c.x.min + (float64(k)+0.5)*step
	}
	c.columns = []column{{"time", "ms", 3}}
	all := [][]float64{}
	for i, s := range subjects {
		levels := highest(s.envelope(c.x), s, times, step)
		p := penOf(i)
		c.marks = append(c.marks, curve{times, levels, p})
		c.keys = append(c.keys, key{text: s.Label, pen: p})
		c.columns = append(c.columns, column{s.Label, "dB", 1})
		all = append(all, levels)
	}
	var skirts []plot.Plotter
	for _, rate := range ratesOf(subjects) {
		identity := Subject{Rate: rate, Response: []float64{1}}
		skirt := highest(identity.envelope(c.x), identity, times, step)
		skirts = append(skirts, curve{times, skirt, skirtLine})
		c.columns = append(c.columns, column{fmt.Sprintf("identity at %g kHz", rate/1000), "dB", 1})
		all = append(all, skirt)
	}
	c.marks = append(append([]plot.Plotter{c.instant()}, skirts...), c.marks...)
	c.keys = append(c.keys, key{text: "identity's own skirt", pen: skirtLine})
	for k, t := range times {
		cells := []cell{exact(t)}
		for _, levels := range all {
			cells = append(cells, exact(levels[k]))
		}
		c.rows = append(c.rows, row{t, cells})
	}
	c.note = fmt.Sprintf("The squared envelope (Heyser 1967), its highest in each %s ms. A perfect delay shows a skirt as well: only what rises above the skirt is the filter's.", fixed(step, 3))
	return c
}

// ratesOf are the subjects' rates, each once.
func ratesOf(subjects []Subject) []float64 {
	var out []float64
	for _, s := range subjects {
		if !slices.Contains(out, s.Rate) {
			out = append(out, s.Rate)
		}
	}
	return out
}

// envelope is that of the response over an axis. What lies farther off than the axis is
// long is left out: it hardly shows, and some responses are many times as long.
func (s Subject) envelope(a axis) level {
	span := int((a.max-a.min)/toMS*s.Rate) + 1
	first := max(0, s.Origin+int(a.min/toMS*s.Rate)-span)
	end := min(len(s.Response), s.Origin+int(a.max/toMS*s.Rate)+span)
	return envelope(s.Response[first:end], s.Origin-first, span)
}

// level is an envelope over time: at[i] is in dB, of sample i - origin.
type level struct {
	at     []float64
	origin int
}

// envelope is the squared magnitude of the analytic signal in dB under its
// maximum, at least reach samples of silence on either side. The transform is long
// enough that what wraps is lower than what is drawn.
func envelope(x []float64, origin, reach int) level {
	size := 1
	for size < 4*(reach+len(x)) {
		size *= 2
	}
	fft := fourier.NewCmplxFFT(size)
	z := make([]complex128, size)
	for n, v := range x {
		z[reach+n] = complex(v, 0)
	}
	z = fft.Coefficients(nil, z)
	for k := 1; k < size/2; k++ {
		z[k] *= 2
	}
	clear(z[size/2+1:])
	z = fft.Sequence(nil, z)
	e := level{at: make([]float64, size), origin: reach + origin}
	var peak float64
	for _, v := range z {
		peak = max(peak, cmplx.Abs(v))
	}
	for n, v := range z {
		e.at[n] = max(2*floorDB, 20*math.Log10(cmplx.Abs(v)/peak))
	}
	return e
}

// highest is the highest level within half a step of each time, in ms.
func highest(e level, s Subject, times []float64, step float64) []float64 {
	out := make([]float64, len(times))
	for k, t := range times {
		from := int(math.Ceil((t-step/2)/toMS*s.Rate)) + e.origin
		to := int(math.Ceil((t+step/2)/toMS*s.Rate)) + e.origin
		out[k] = slices.Max(e.at[max(0, from):min(max(to, from+1), len(e.at))])
	}
	return out
}
