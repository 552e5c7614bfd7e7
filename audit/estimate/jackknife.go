package estimate

import (
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

// Jackknife is a figure and the half width of its 95 % interval, from the figure
// of all n repeats together (whole) and the figures with one of them left out.
//
// The value is n·whole - (n-1)·mean(without) (Quenouille 1956): what grows with
// 1/n goes, and that is what noise adds to an energy, so it is noise-free where
// whole is an energy. The variance is (n-1)/n·Σ(without - mean)² (Tukey 1958), the
// interval Student's, see freedom. With fewer than two repeats the value is whole
// and the interval NaN; a NaN among the arguments makes both NaN.
func Jackknife(whole float64, without []float64) (value, half float64) {
	n := float64(len(without))
	if n < 2 {
		return whole, math.NaN()
	}
	var sum float64
	for _, v := range without {
		sum += v
	}
	mean := sum / n
	var squares, fourths float64
	for _, v := range without {
		d := (v - mean) * (v - mean)
		squares += d
		fourths += d * d
	}
	value = n*whole - (n-1)*mean
	return value, student(freedom(n, squares, fourths)) * math.Sqrt((n-1)/n*squares)
}

// freedom is the number of degrees of freedom of n deviations with the given sums of
// squares and fourth powers. Where their variances differ it is (Σσ²)²/Σσ⁴
// (Satterthwaite 1946), with σ⁴ for a third of the fourth power as for normal numbers;
// scaled to n-1 where they are even, for which Σd⁴/(Σd²)² is 3(n-1)/(n(n+1)) in
// the mean.
func freedom(n, squares, fourths float64) float64 {
	if squares == 0 {
		return n - 1
	}
	uneven := fourths / (squares * squares) * n * (n + 1) / (3 * (n - 1))
	return (n - 1) / max(uneven, 1)
}

// student is how many standard errors Student's t reaches either way in 95 % of
// cases.
func student(freedom float64) float64 {
	return distuv.StudentsT{Sigma: 1, Nu: freedom}.Quantile(0.975)
}

// RootOf is the root of a square that noise can make negative, and the half width
// of its interval from that of the square: the farther end of the two, so that
// the interval holds the root of every value that the square's holds.
func RootOf(square, half float64) (root, rootHalf float64) {
	square = max(square, 0)
	root = math.Sqrt(square)
	above := math.Sqrt(square+half) - root
	below := root - math.Sqrt(max(square-half, 0))
	return root, max(above, below)
}

// Decibels is an energy ratio and the half width of its interval in dB: the farther
// end of the two. stated is false where the interval reaches 0, so that there may
// be nothing; under is then the level that the ratio does not exceed.
func Decibels(ratio, half float64) (level, levelHalf, under float64, stated bool) {
	if !(ratio-half > 0) && !math.IsNaN(half) {
		return math.NaN(), math.NaN(), 10 * math.Log10(max(ratio, 0)+half), false
	}
	return 10 * math.Log10(ratio), 10 * math.Log10(ratio/(ratio-half)), math.NaN(), true
}
