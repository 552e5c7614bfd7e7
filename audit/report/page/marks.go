package page

import (
	"math"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// curve is a line with gaps where y is not stated. It is cut at the frame.
type curve struct {
	x, y []float64
	pen  pen
}

func (m curve) Plot(c draw.Canvas, p *plot.Plot) {
	tx, ty := p.Transforms(&c)
	for _, run := range stretches(m.y) {
		var line []vg.Point
		for i := run[0]; i < run[1]; i++ {
			line = append(line, vg.Point{X: tx(m.x[i]), Y: ty(drawable(p, m.y[i]))})
		}
		c.StrokeLines(m.pen.style(), c.ClipLinesXY(line)...)
	}
}

// drawable puts what is infinite far out of the frame.
func drawable(p *plot.Plot, y float64) float64 {
	far := 100 * (p.Y.Max - p.Y.Min)
	return min(max(y, p.Y.Min-far), p.Y.Max+far)
}

// ribbon fills what lies between two lines, where both are stated: the rasteriser never
// comes to the end of a shape with a corner nowhere.
type ribbon struct {
	x, low, high []float64
	ink          ink
	share        uint8 // of opacity, 255 for all
}

func (m ribbon) Plot(c draw.Canvas, p *plot.Plot) {
	tx, ty := p.Transforms(&c)
	within := func(y float64) vg.Length { return ty(min(max(y, p.Y.Min), p.Y.Max)) }
	fill := m.ink.NRGBA
	fill.A = m.share
	for _, run := range stretches(m.widths()) {
		var edge []vg.Point
		for i := run[0]; i < run[1]; i++ {
			edge = append(edge, vg.Point{X: tx(m.x[i]), Y: within(m.high[i])})
		}
		for i := run[1] - 1; i >= run[0]; i-- {
			edge = append(edge, vg.Point{X: tx(m.x[i]), Y: within(m.low[i])})
		}
		if edge = c.ClipPolygonXY(edge); len(edge) > 2 {
			c.FillPolygon(fill, edge)
		}
	}
}

// widths are NaN where one of the lines is.
func (m ribbon) widths() []float64 {
	out := make([]float64, len(m.high))
	for i, high := range m.high {
		if out[i] = high; math.IsNaN(m.low[i]) {
			out[i] = math.NaN()
		}
	}
	return out
}

// stretches are the index ranges in which values are stated.
func stretches(y []float64) [][2]int {
	var out [][2]int
	open := false
	for i, v := range y {
		switch {
		case math.IsNaN(v):
			open = false
		case open:
			out[len(out)-1][1] = i + 1
		default:
			out, open = append(out, [2]int{i, i + 1}), true
		}
	}
	return out
}

// segment is a straight line; what is not stated is not drawn.
type segment struct{ x0, y0, x1, y1 float64 }

type segments struct {
	lines []segment
	pen   pen
}

func (m segments) Plot(c draw.Canvas, p *plot.Plot) {
	tx, ty := p.Transforms(&c)
	for _, s := range m.lines {
		if math.IsNaN(s.x0 + s.y0 + s.x1 + s.y1) {
			continue
		}
		line := []vg.Point{{X: tx(s.x0), Y: ty(s.y0)}, {X: tx(s.x1), Y: ty(s.y1)}}
		c.StrokeLines(m.pen.style(), c.ClipLinesXY(line)...)
	}
}

// dots are points; those outside the frame are not drawn.
type dots struct {
	x, y []float64
	ink  ink
}

func (m dots) Plot(c draw.Canvas, p *plot.Plot) {
	tx, ty := p.Transforms(&c)
	style := draw.GlyphStyle{Color: m.ink.NRGBA, Radius: 2.2, Shape: draw.CircleGlyph{}}
	for i, x := range m.x {
		if !math.IsNaN(x + m.y[i]) {
			c.DrawGlyph(style, vg.Point{X: tx(x), Y: ty(m.y[i])})
		}
	}
}
