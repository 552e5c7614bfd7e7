package estimate

import (
	"math"

	"gonum.org/v1/gonum/stat"
)

// Line is a straight line through points, and the half width of its slope's 95 %
// interval: NaN with fewer than three points, whose scatter says nothing.
type Line struct {
	At0, Slope float64
	SlopeHalf  float64
	// Scatter is the RMS of the residuals over n-2 degrees of freedom; NaN
	// likewise.
	Scatter float64
}

// FitLine fits by least squares. x and y are equally long, at least two, and
// not all x are equal.
func FitLine(x, y []float64) Line {
	l := Line{SlopeHalf: math.NaN(), Scatter: math.NaN()}
	l.At0, l.Slope = stat.LinearRegression(x, y, nil, false)
	freedom := float64(len(x) - 2)
	if freedom < 1 {
		return l
	}
	mean := stat.Mean(x, nil)
	var squares, spread float64
	for i := range x {
		off := y[i] - l.At0 - l.Slope*x[i]
		squares += off * off
		spread += (x[i] - mean) * (x[i] - mean)
	}
	l.Scatter = math.Sqrt(squares / freedom)
	l.SlopeHalf = student(freedom) * l.Scatter / math.Sqrt(spread)
	return l
}
