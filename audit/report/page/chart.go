package page

import (
	"math"
	"strconv"

	"gonum.org/v1/plot"
)

// chart is a plot and the table behind it, before it is drawn.
type chart struct {
	name, title, note string
	x, y              axis
	tall              bool
	marks             []plot.Plotter // in drawing order
	keys              []key
	columns           []column // of the table, the readings' own first
	rows              []row
	down              bool // readings run along y
}

type axis struct {
	label    string
	min, max float64
	log      bool
	named    []plot.Tick // instead of numbers
}

// key is one entry of a legend.
type key struct {
	text string
	pen  pen
	fill bool
}

type column struct {
	name, unit string
	digits     int // after the point
}

func (c column) heading() string {
	if c.unit == "" {
		return c.name
	}
	return c.name + ", " + c.unit
}

// row is one reading; at is its place on the axis that readings run along.
type row struct {
	at    float64
	cells []cell // one for each column
}

// cell is a value with the half width of its interval, 0 or NaN for none. Text
// stands in its place where it is no number.
type cell struct {
	value, half float64
	text        string
}

func exact(x float64) cell { return cell{value: x} }

func (c column) view(x cell) viewCell {
	switch {
	case x.text != "":
		return viewCell{Text: x.text, Value: x.text}
	case math.IsNaN(x.value) || math.IsInf(x.value, 0):
		return viewCell{Text: "not stated"}
	}
	v := viewCell{Value: strconv.FormatFloat(x.value, 'g', -1, 64), Text: fixed(x.value, c.digits)}
	if x.half > 0 {
		v.Text += " ± " + fixed(x.half, c.digits)
	}
	return v
}

// fixed prints digits after the point, with a true minus. What rounds to zero
// has no sign.
func fixed(x float64, digits int) string {
	text := strconv.FormatFloat(math.Abs(x), 'f', digits, 64)
	if zero, _ := strconv.ParseFloat(text, 64); zero == 0 || x >= 0 {
		return text
	}
	return "−" + text
}

// charts are all plots of a page, in their order.
func charts(subjects []Subject) []*chart {
	var drawn []Subject
	for _, s := range subjects {
		if s.Figures != nil && len(s.Figures.Curve.Hz) > 0 && len(s.Figures.Bands) > 0 {
			drawn = append(drawn, s)
		}
	}
	if drawn == nil {
		return nil
	}
	out := []*chart{magnitude(drawn)}
	if c := deviation(drawn); c != nil {
		out = append(out, c)
	}
	out = append(out, groupDelay(drawn))
	out = append(out, underLimits(drawn)...)
	if c := phaseDeviation(drawn); c != nil {
		out = append(out, c)
	}
	out = append(out, timelines(drawn)...)
	return append(out, inTime(drawn)...)
}

// label names a chart's subject where there are several.
func label(subjects []Subject, i int) string {
	if len(subjects) == 1 {
		return ""
	}
	return ": " + subjects[i].Label
}

// numbered makes a file name of a chart's, for one of several subjects.
func numbered(name string, subjects []Subject, i int) string {
	if len(subjects) == 1 {
		return name
	}
	return name + "-" + strconv.Itoa(i+1)
}
