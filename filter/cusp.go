package filter

import (
	"math"

	"fettle/filter/design"
	"fettle/filter/response"
)

// A cusp is where |H| touches zero at an angle: the centre of a notch, DC
// under a first-order high-pass. A linear-phase kernel for it decays only as
// 1/t^2, so inside its -3 dB width the target is one-sided: at least the
// curve's attenuation, up to a depth; deeper is free.
//
// In the bilinear variable tan(omega/2) each such stage is x/sqrt(x^2 + 1),
// with x its distance from the zero in half widths. The smooth twin
// x^2/(x^2 + sqrt 2 - 1) has the same -3 dB width, never less attenuation
// inside it and at most 0.132 dB less outside.
type cusp struct {
	distance func(w float64) float64 // x at w = tan(omega/2); -3 dB at 1
	shallow  float64                 // 10^(-depth/20)
	points   []float64               // omega where the depth begins and ends to bind
}

// depth is how many dB a one-sided part must reach.
type depth struct{ db float64 }

const (
	twinSquare = math.Sqrt2 - 1
	// twinMargin in dB is what is left of 0.15 dB, the tolerance of a stage
	// with a smooth twin, where the twin strays furthest from the curve.
	twinMargin = 0.15 - 0.1318
)

// of finds the cusps of a stage of sections that each have one: a first-order
// high-pass, or a second-order band-stop with its zeros on the unit circle.
func (d *depth) of(sections []response.Section) []*cusp {
	var out []*cusp
	for _, s := range sections {
		if s.B2 == 0 {
			// The pole at (1-t)/(1+t) tells the corner t.
			out = append(out, d.highpass((1+s.A1)/(1-s.A1)))
			continue
		}
		// s^2 + width s + square over the bilinear variable, with zeros at
		// cos omega = -B1/(2 B0).
		cos := -s.B1 / (2 * s.B0)
		square := (1 - cos) / (1 + cos)
		out = append(out, d.band(square, (1+square)*(1-s.A2)/(1+s.A2)))
	}
	return out
}

// highpass serves a zero at DC, -3 dB at corner in the bilinear variable.
func (d *depth) highpass(corner float64) *cusp {
	c := d.cusp(func(w float64) float64 { return w / corner })
	for _, x := range c.near() {
		c.points = append(c.points, 2*math.Atan(corner*x))
	}
	return c
}

// band serves a zero at the root of square, in the bilinear variable, with
// -3 dB points width apart.
func (d *depth) band(square, width float64) *cusp {
	c := d.cusp(func(w float64) float64 {
		if w == 0 {
			return math.Inf(1)
		}
		return math.Abs(w*w-square) / (w * width)
	})
	for _, x := range c.near() {
		// Both solutions of w^2 -+ x width w - square = 0.
		half := x * width / 2
		root := math.Sqrt(half*half + square)
		c.points = append(c.points, 2*math.Atan(root-half), 2*math.Atan(root+half))
	}
	return c
}

func (d *depth) cusp(distance func(float64) float64) *cusp {
	return &cusp{distance: distance, shallow: math.Pow(10, -d.db/20)}
}

// near lists distances from the zero at which the curve runs through the
// levels round the depth, where a grid fit for the whole would see nothing.
func (c *cusp) near() []float64 {
	out := []float64{0}
	for x := c.shallow / 2; x < 1; x *= 2 {
		out = append(out, x)
	}
	return out
}

// level is the stage's target at w = tan(omega/2), one-sided near its zero and
// aimed at by the twin.
func (c *cusp) level(w float64) design.Level {
	x := c.distance(w)
	if math.IsInf(x, 1) {
		return curveLevel(1)
	}
	magnitude, twin := x/math.Sqrt(x*x+1), x*x/(x*x+twinSquare)
	if x < 1 {
		return design.Level{Aim: twin, High: math.Max(magnitude, c.shallow)}
	}
	return design.Level{Aim: twin, Low: magnitude, High: magnitude}
}
