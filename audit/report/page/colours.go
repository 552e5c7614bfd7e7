package page

import (
	"fmt"
	"image/color"
	"strings"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// ink is a colour of the light palette. Plots are drawn with it as it is; on the
// page each becomes a variable of the style sheet, which has a dark twin.
type ink struct {
	color.NRGBA
	variable string
}

func newInk(variable string, hex uint32) ink {
	return ink{color.NRGBA{uint8(hex >> 16), uint8(hex >> 8), uint8(hex), 255}, variable}
}

// As in page.css.
var (
	text   = newInk("--ink", 0x23292e)
	muted  = newInk("--muted", 0x5a626a)
	grid   = newInk("--grid", 0xdedbd2)
	shade  = newInk("--shade", 0xe9e4d6)
	bound  = newInk("--bound", 0xb01f33)
	ghost  = newInk("--ghost", 0x868d94)
	series = []ink{
		newInk("--s1", 0x0b5f8a), newInk("--s2", 0xb4540a), newInk("--s3", 0x4a7a1a),
		newInk("--s4", 0x8a3a86), newInk("--s5", 0x776600), newInk("--s6", 0x237b76),
	}
)

// themed puts the style sheet's variables in the place of colours.
var themed = func() *strings.Replacer {
	var pairs []string
	for _, i := range append([]ink{text, muted, grid, shade, bound, ghost}, series...) {
		pairs = append(pairs, fmt.Sprintf("#%02X%02X%02X", i.R, i.G, i.B), "var("+i.variable+")")
	}
	return strings.NewReplacer(pairs...)
}()

// pen is how a line is drawn.
type pen struct {
	ink
	width vg.Length
	dash  []vg.Length
}

func (p pen) style() draw.LineStyle {
	return draw.LineStyle{Color: p.NRGBA, Width: p.width, Dashes: p.dash}
}

var dashes = [][]vg.Length{nil, {6, 2.5}, {2, 2}, {8, 2, 2, 2}, {4, 1.5}, {1, 2}}

// penOf tells subjects apart by colour and by dash.
func penOf(i int) pen {
	return pen{series[i%len(series)], 1.5, dashes[(i+i/len(series))%len(dashes)]}
}

var (
	zeroLine  = pen{ink: muted, width: 0.7}
	boundLine = pen{ink: bound, width: 1.6, dash: []vg.Length{4, 2}}
	skirtLine = pen{ink: ghost, width: 1.1, dash: []vg.Length{3, 2}}
)
