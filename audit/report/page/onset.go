package page

import (
	"fmt"
	"math"
	"slices"

	"fettle/audio"
	"fettle/audit/hear"

	"gonum.org/v1/plot"
)

const (
	onsetReadings = 120 // in the table of a waveform
	onsetSteps    = 120 // of the level view
	onsetFloorDB  = -90 // the lowest of the level view
	// Values are rounded to these, far finer than can be seen.
	waveStep, levelStep = 1e-6, 0.01
)

var originalLine = pen{ink: ghost, width: 2}

// aboutOnset has the plots about the onset: levels of all in one, then each waveform.
func aboutOnset(e *hear.Excerpts) []*chart {
	if e == nil || len(e.Outputs) == 0 {
		return nil
	}
	out := []*chart{onsetLevels(e)}
	top := waveStep // of silence
	for i := range e.Outputs {
		c := waveform(e, i)
		top = max(top, -c.y.min, c.y.max)
		out = append(out, c)
	}
	for _, c := range out[1:] { // on one scale, to be compared
		c.y.min, c.y.max = roundedRange(-1.05*top, 1.05*top)
	}
	return out
}

// ms is when a sample is, after the onset.
func ms(z hear.Zoom, sample int) float64 { return (z.First + float64(sample)/z.Rate) * toMS }

func onsetAxis(before, after float64) axis {
	return axis{label: "time after the onset, ms", min: -before * toMS, max: after * toMS}
}

// instantKey is of the line at 0.
func instantKey(e *hear.Excerpts) key {
	if e.Clear {
		return key{text: "the onset", pen: zeroLine}
	}
	return key{text: "the largest sample", pen: zeroLine}
}

// waveform draws an output over the original.
func waveform(e *hear.Excerpts, i int) *chart {
	z, o := e.Zoom, e.Zoom.Outputs[i]
	label := e.Outputs[i].Label
	c := &chart{name: fmt.Sprintf("onset-%d", i+1), title: "Waveform about the onset: " + label, x: onsetAxis(o.Before, o.After)}
	c.y.label = "sample value, full scale = 1"
	c.columns = []column{{"time", "ms", 3}, {"original", "", 5}, {label, "", 5}}
	var at, original, output []float64
	origin := 0 // the first sample after the onset
	for n := range z.Original {
		if t := ms(z, n); t >= c.x.min && t <= c.x.max {
			if t < 0 {
				origin++
			}
			at, original, output = append(at, t), append(original, rounded(z.Original[n], waveStep)), append(output, rounded(o.Samples[n], waveStep))
		}
	}
	stride := 1 + len(at)/onsetReadings
	c.note = fmt.Sprintf("Channel %d as rendered, not matched in level.", e.Channel)
	if stride > 1 {
		c.note += fmt.Sprintf(" The table has one sample in %d.", stride)
	}
	for k := origin % stride; k < len(at); k += stride {
		c.rows = append(c.rows, row{at[k], []cell{exact(rounded(at[k], waveStep)), exact(original[k]), exact(output[k])}})
	}
	c.y.min = min(slices.Min(original), slices.Min(output))
	c.y.max = max(slices.Max(original), slices.Max(output))
	p := penOf(i)
	p.width, p.dash = 1.2, nil
	line := func(y []float64, p pen) curve {
		tx, ty := thinned(at, y)
		return curve{tx, ty, p}
	}
	c.marks = []plot.Plotter{c.zero(), c.instant(), line(original, originalLine), line(output, p)}
	c.keys = []key{{text: "original", pen: originalLine}, {text: label, pen: p}, instantKey(e)}
	return c
}

// onsetLevels draws how high the waveforms are, in dB under the original's highest
// sample, so that what is far under it can be seen.
func onsetLevels(e *hear.Excerpts) *chart {
	z := e.Zoom
	before, after := 0.0, 0.0
	for _, o := range z.Outputs {
		before, after = max(before, o.Before), max(after, o.After)
	}
	c := &chart{name: "onset-levels", title: "Level about the onset", x: onsetAxis(before, after)}
	c.y = axis{label: "level, dB re the original's highest", min: onsetFloorDB, max: 10}
	step := max((c.x.max-c.x.min)/onsetSteps, 2/z.Rate*toMS)
	// The onset parts two steps: what follows it is in none before it.
	first, last := int(math.Ceil(c.x.min/step)), int(math.Floor(c.x.max/step))
	times := make([]float64, last-first)
	for k := range times {
		times[k] = (float64(first+k) + 0.5) * step
	}
	peak := slices.Max(magnitudes(z.Original))
	c.columns = []column{{"time", "ms", 3}}
	var all [][]float64
	c.marks = []plot.Plotter{c.instant()}
	add := func(label string, samples []float64, p pen) {
		levels := highestSamples(z, samples, peak, times, step)
		all = append(all, levels)
		c.marks = append(c.marks, curve{times, levels, p})
		c.keys = append(c.keys, key{text: label, pen: p})
		c.columns = append(c.columns, column{label, "dB", 1})
	}
	add("original", z.Original, originalLine)
	for i, o := range z.Outputs {
		add(e.Outputs[i].Label, o.Samples, penOf(i))
	}
	c.keys = append(c.keys, instantKey(e))
	for k, t := range times {
		cells := []cell{exact(rounded(t, waveStep))}
		for _, levels := range all {
			cells = append(cells, exact(levels[k]))
		}
		c.rows = append(c.rows, row{t, cells})
	}
	c.y.min = lowest(all)
	c.note = fmt.Sprintf("The highest sample of channel %d in each %s ms, as rendered. What an output shows ahead of the onset and the original does not is pre-ring.", e.Channel, fixed(step, 3))
	return c
}

// lowest is where an axis begins that has all levels over onsetFloorDB.
func lowest(all [][]float64) float64 {
	low := -20.0
	for _, levels := range all {
		for _, v := range levels {
			if v < low { // NaN is not
				low = v
			}
		}
	}
	return max(onsetFloorDB, math.Floor(low/10)*10)
}

func magnitudes(x []float64) []float64 {
	out := make([]float64, len(x))
	for i, v := range x {
		out[i] = math.Abs(v)
	}
	return out
}

// highestSamples is the highest sample within half a step of each time, in dB re a
// peak; NaN where there is no sample or only silence.
func highestSamples(z hear.Zoom, samples []float64, peak float64, times []float64, step float64) []float64 {
	out := make([]float64, len(times))
	for k, t := range times {
		from := max(0, int(math.Ceil((t-step/2)/toMS*z.Rate-z.First*z.Rate)))
		to := min(len(samples), int(math.Ceil((t+step/2)/toMS*z.Rate-z.First*z.Rate)))
		out[k] = math.NaN()
		if from < to {
			if top := slices.Max(magnitudes(samples[from:to])) / peak; top > 0 && !math.IsInf(top, 0) {
				out[k] = rounded(audio.DB(top), levelStep)
			}
		}
	}
	return out
}

// rounded is the multiple of a step, 1 over a whole number, nearest to x.
func rounded(x, step float64) float64 {
	whole := math.Round(1 / step)
	return math.Round(x*whole) / whole
}
