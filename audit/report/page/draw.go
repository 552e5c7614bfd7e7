package page

import (
	"bytes"
	"fmt"
	"html"
	"html/template"
	"image/color"
	"regexp"
	"strings"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/plotter"
	gotext "gonum.org/v1/plot/text"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
	"gonum.org/v1/plot/vg/vgimg"
	"gonum.org/v1/plot/vg/vgsvg"
)

// Sizes of a picture in points, few enough that its letters can be read where
// it is 360 wide.
const (
	pictureWidth = 460
	plainHeight  = 285
	tallHeight   = 470
	edge         = 6
)

func (c *chart) height() vg.Length {
	if c.tall {
		return tallHeight
	}
	return plainHeight
}

func lettering(size vg.Length, i ink) gotext.Style {
	return gotext.Style{
		Color: i.NRGBA, Handler: plot.DefaultTextHandler,
		Font: font.Font{Typeface: "Liberation", Variant: "Sans", Size: size},
	}
}

// plot is the chart without its legend.
func (c *chart) plot() *plot.Plot {
	p := plot.New()
	p.BackgroundColor = nil
	c.x.set(&p.X)
	c.y.set(&p.Y)
	p.Y.Label.Padding = 3
	if len(c.y.named) > 0 {
		p.Y.Tick.Label.Font.Size = 8
	}
	g := plotter.NewGrid()
	line := draw.LineStyle{Color: grid.NRGBA, Width: 0.6}
	g.Horizontal, g.Vertical = line, line
	p.Add(g)
	p.Add(c.marks...)
	return p
}

func (a axis) set(to *plot.Axis) {
	to.Min, to.Max = a.min, a.max
	to.Label.Text = a.label
	to.Padding = 0
	to.Color, to.Tick.Color = muted.NRGBA, muted.NRGBA
	to.Tick.Length = 4
	label, tick := lettering(10, text), lettering(9, muted)
	to.Label.TextStyle.Font, to.Label.TextStyle.Color = label.Font, label.Color
	to.Tick.Label.Font, to.Tick.Label.Color = tick.Font, tick.Color
	switch {
	case a.named != nil:
		to.Tick.Marker = namedTicks(a.named)
	case a.log:
		to.Scale, to.Tick.Marker = plot.LogScale{}, hertzTicks{}
	default:
		to.Tick.Marker = evenTicks{}
	}
}

// draw draws legend and plot, and gives the frame of the data and what places
// readings along it, both as shares of the picture.
func (c *chart) draw(on draw.Canvas, title string) (frame vg.Rectangle, place func(at float64) float64) {
	size := on.Size()
	inner := draw.Crop(on, edge, -edge, edge, -edge)
	if title != "" {
		style := lettering(12, text)
		inner.FillText(style, vg.Point{X: inner.Min.X, Y: inner.Max.Y - 10}, shortened(title, style, inner.Size().X))
		inner.Max.Y -= 18
	}
	inner.Max.Y -= c.legend(inner)
	p := c.plot()
	p.Draw(inner)
	data := p.DataCanvas(inner)
	tx, ty := p.Transforms(&data)
	place = func(at float64) float64 {
		if c.down {
			return 1 - float64(ty(at)/size.Y)
		}
		return float64(tx(at) / size.X)
	}
	return vg.Rectangle{
		Min: vg.Point{X: data.Min.X / size.X, Y: data.Min.Y / size.Y},
		Max: vg.Point{X: data.Max.X / size.X, Y: data.Max.Y / size.Y},
	}, place
}

const (
	swatch    = 20
	legendRow = 13
)

// legend draws the keys in rows from the top, and gives the height they take.
func (c *chart) legend(on draw.Canvas) vg.Length {
	style := lettering(9.5, text)
	x, y := on.Min.X, on.Max.Y-legendRow
	for _, k := range c.keys {
		name := shortened(k.text, style, on.Size().X-swatch-4)
		width := swatch + 4 + style.Width(name)
		if x > on.Min.X && x+width > on.Max.X {
			x, y = on.Min.X, y-legendRow
		}
		k.draw(on, x, y+3)
		on.FillText(style, vg.Point{X: x + swatch + 4, Y: y}, name)
		x += width + 14
	}
	return on.Max.Y - y + 5
}

func (k key) draw(on draw.Canvas, x, y vg.Length) {
	if k.fill {
		on.FillPolygon(k.pen.NRGBA, []vg.Point{{X: x, Y: y - 3}, {X: x + swatch, Y: y - 3}, {X: x + swatch, Y: y + 4}, {X: x, Y: y + 4}})
		return
	}
	on.StrokeLine2(k.pen.style(), x, y, x+swatch, y)
}

// shortened cuts a text that is wider than it may be.
func shortened(name string, style gotext.Style, width vg.Length) string {
	runes := []rune(name)
	for len(runes) > 1 && style.Width(name) > width {
		runes = runes[:len(runes)-1]
		name = strings.TrimSpace(string(runes)) + "…"
	}
	return name
}

// header is what vgsvg puts ahead of the drawing.
var header = regexp.MustCompile(`(?s)^.*?<svg[^>]*viewBox="([^"]*)"[^>]*>`)

func (c *chart) svg(title string, background bool) (text string, frame vg.Rectangle, place func(float64) float64, err error) {
	canvas := vgsvg.New(pictureWidth, c.height())
	on := draw.New(canvas)
	if background {
		on.SetColor(color.White)
		on.Fill(on.Rectangle.Path())
	}
	frame, place = c.draw(on, title)
	var b bytes.Buffer
	_, err = canvas.WriteTo(&b)
	return b.String(), frame, place, err
}

// view is the chart for the page: in the style sheet's colours, and of the size
// that the page gives it.
func (c *chart) view() (view, error) {
	text, frame, place, err := c.svg("", false)
	if err != nil {
		return view{}, err
	}
	v := view{
		Name: c.name, Title: c.title, Note: c.note, Down: c.down, Description: c.description(),
		Left: 100 * float64(frame.Min.X), Right: 100 * (1 - float64(frame.Max.X)),
		Bottom: 100 * float64(frame.Min.Y), Top: 100 * (1 - float64(frame.Max.Y)),
	}
	open := fmt.Sprintf(`<svg viewBox="$1" role="img" aria-label="%s">`, strings.ReplaceAll(html.EscapeString(v.Description), "$", "$$"))
	v.SVG = template.HTML(header.ReplaceAllString(themed.Replace(text), open))
	for _, col := range c.columns {
		v.Head = append(v.Head, col.heading())
	}
	for _, r := range c.rows {
		out := viewRow{At: 100 * place(r.at)}
		for i, x := range r.cells {
			out.Cells = append(out.Cells, c.columns[i].view(x))
		}
		out.Label, out.Cells = out.Cells[0], out.Cells[1:]
		v.Rows = append(v.Rows, out)
	}
	return v, nil
}

// description says in words what a picture holds.
func (c *chart) description() string {
	var names []string
	for _, k := range c.keys {
		names = append(names, k.text)
	}
	return fmt.Sprintf("Plot: %s. Across: %s. Up: %s. Drawn: %s.", c.title, c.x.label, c.y.label, strings.Join(names, "; "))
}

// png draws the chart at 200 dots an inch.
func (c *chart) png() ([]byte, error) {
	canvas := vgimg.PngCanvas{Canvas: vgimg.NewWith(vgimg.UseWH(pictureWidth, c.height()), vgimg.UseDPI(200), vgimg.UseBackgroundColor(color.White))}
	c.draw(draw.New(canvas), c.title)
	var b bytes.Buffer
	_, err := canvas.WriteTo(&b)
	return b.Bytes(), err
}
