package response

import (
	"math"
	"testing"
)

// The rule is exact for cubics, wherever the ends lie: between bins, on them, within one
// interval.
func TestQuadratureIsExactForCubics(t *testing.T) {
	const step = 0.25
	cubic := func(f float64) float64 { return 3 - 2*f + 0.5*f*f - 0.1*f*f*f }
	integral := func(f float64) float64 { return 3*f - f*f + f*f*f/6 - 0.025*f*f*f*f }
	for _, c := range [][2]float64{{1, 2}, {1.03, 1.07}, {1.1, 1.3}, {0.5, 9.99}, {2.24, 2.26}, {3, 3.75}, {1.9, 3.1}} {
		sum := 0.0
		EachBin(step, c[0], c[1], func(k int, width float64) { sum += width * cubic(float64(k)*step) })
		near(t, "integral", sum, integral(c[1])-integral(c[0]), 1e-12)
		q := NewQuadrature(step, c[0], c[1])
		total := 0.0
		for k := q.First; k <= q.Last; k++ {
			total += q.Width(k)
		}
		near(t, "widths", total, c[1]-c[0], 1e-14*(1+c[1]))
	}
}

// Pink weights add up to the logarithm of the range; the rule's error is under 1e-7 at
// ten bins to a hertz.
func TestPinkWeights(t *testing.T) {
	const rate, step = 8000, 0.1
	sum := 0.0
	EachPink(step, rate, func(_ int, pink float64) { sum += pink })
	near(t, "total", sum, math.Log(TopOfBand*rate/PinkFrom), 1e-7)
}
