package design

import (
	"fmt"
	"math"
	"math/cmplx"
	"slices"

	"fettle/filter/response"
)

// ReflectSections returns the minimum-phase cascade of the same magnitude:
// each zero outside the unit circle goes to its reciprocal conjugate and the
// gain takes up its magnitude, so |H| is unchanged at every frequency. Zeros on
// the circle stay; a zero at infinity (B0 = 0) goes to the origin, that is, a
// delay is dropped. The first non-zero numerator coefficient keeps its sign. An
// all-pass becomes the gain it is.
//
// It fails if a pole lies on or outside the circle: reflecting it would change
// the filter into another, and none of this package's designs has one.
// Source: Oppenheim & Schafer, section on minimum-phase systems.
func ReflectSections(s []response.Section) ([]response.Section, error) {
	reflected := make([]response.Section, len(s))
	for i, section := range s {
		if !response.Stable(s[i : i+1]) {
			return nil, fmt.Errorf("minimum phase: section %d has a pole on or outside the unit circle (radius %.9g); only stable sections can be converted",
				i+1, response.MaxPoleRadius(s[i:i+1]))
		}
		b := reflectNumerator([3]float64{section.B0, section.B1, section.B2})
		reflected[i] = response.Section{B0: b[0], B1: b[1], B2: b[2], A1: section.A1, A2: section.A2}
	}
	return reflected, nil
}

// reflectNumerator moves the zeros of b0 + b1/z + b2/z^2 into the circle.
// Reversing the coefficients reflects both zeros at once and is exact.
func reflectNumerator(b [3]float64) [3]float64 {
	if b == [3]float64{} {
		return b
	}
	for b[0] == 0 {
		b = [3]float64{b[1], b[2], 0}
	}
	sign := math.Copysign(1, b[0])
	if b[2] == 0 {
		if math.Abs(b[1]) > math.Abs(b[0]) {
			b[0], b[1] = b[1], b[0]
		}
		return signed(b, sign)
	}
	zeros := response.Section{B0: b[0], B1: b[1], B2: b[2]}.Zeros()
	first, second := outside(zeros[0]), outside(zeros[1])
	switch {
	case first && second:
		b[0], b[2] = b[2], b[0]
	case first != second:
		b = reflectOne(b[0], real(zeros[0]), real(zeros[1]))
	}
	return signed(b, sign)
}

// outside leaves a zero on the circle, to within rounding, where it is.
func outside(zero complex128) bool { return cmplx.Abs(zero) > 1+1e-12 }

// reflectOne handles two real zeros of which one lies outside.
func reflectOne(gain, p, q float64) [3]float64 {
	if math.Abs(p) < math.Abs(q) {
		p, q = q, p
	}
	gain, p = gain*math.Abs(p), 1/p
	return [3]float64{gain, -gain * (p + q), gain * p * q}
}

func signed(b [3]float64, sign float64) [3]float64 {
	if math.Copysign(1, b[0]) != sign {
		return [3]float64{-b[0], -b[1], -b[2]}
	}
	return b
}

const (
	leastGrid = 1 << 12 // a zero on the circle makes short grids useless
	mostGrid  = 1 << 24
	logFloor  = 1e-8 // -160 dB of the maximum: what log|H| is floored at
)

// MinimumPhase returns the minimum-phase kernel of the same length and the same
// full magnitude (not its square root) as taps, by the real cepstrum:
// log|H| is transformed back, its part at negative times folded onto positive
// ones, and the result exponentiated. |H| is floored at -160 dB of its maximum
// where the logarithm would not exist. The first tap is positive whatever the
// polarity of the input.
//
// The grid starts at 16 times the length, at least 4096 points, and is doubled
// until the measured magnitude of the returned taps satisfies
//
//	| |Hmin| - |H| | <= (10^(tolDB/20) - 1)|H| + 10^(-80/20) max|H|
//
// at all points of a grid four times as dense (twice, on the largest), because
// at its own points a conversion looks better than it is. worstDB is the least tolDB with which the result would pass, as measured: 0
// if all errors are under the second term.
//
// It fails for kernels that are empty, zero or not finite, for a tolDB that is
// not positive, and if 2^24 points do not reach the tolerance.
// Source: Oppenheim & Schafer, chapter on cepstrum analysis; Smith,
// Introduction to Digital Filters (2007), on minimum-phase conversion.
func MinimumPhase(taps []float64, tolDB float64) (minimum []float64, worstDB float64, err error) {
	if err := checkConvertible(taps, tolDB); err != nil {
		return nil, 0, fmt.Errorf("minimum phase: %w", err)
	}
	for grid := response.NextPow2(16 * max(len(taps), leastGrid/16)); grid <= mostGrid; grid *= 2 {
		minimum = foldedKernel(taps, grid)
		var excess float64
		excess, worstDB = magnitudeErrors(taps, minimum, tolDB, min(4*grid, 2*mostGrid))
		if excess <= guard {
			return minimum, worstDB, nil
		}
	}
	return nil, worstDB, fmt.Errorf("minimum phase: %d taps reach a magnitude within %.3g dB only where %g dB are asked, on the largest grid of %d points; allow more, or shorten the kernel",
		len(taps), worstDB, tolDB, mostGrid)
}

func checkConvertible(taps []float64, tolDB float64) error {
	if !(tolDB > 0) {
		return fmt.Errorf("a tolerance of %g dB is not above 0 dB", tolDB)
	}
	if 16*len(taps) > mostGrid {
		return fmt.Errorf("%d taps are more than the %d that can be converted; shorten the kernel", len(taps), mostGrid/16)
	}
	largest := 0.0
	for n, h := range taps {
		if math.IsNaN(h) || math.IsInf(h, 0) {
			return fmt.Errorf("tap %d is %g, not a finite number", n, h)
		}
		largest = math.Max(largest, math.Abs(h))
	}
	if largest == 0 {
		return fmt.Errorf("a kernel of %d zeros has no magnitude to keep", len(taps))
	}
	return nil
}

// magnitudeErrors compares a kernel's magnitude with the wanted one's, on a grid of so
// many points: the excess over the tolerance at the worst (see Grid.Excess) and the
// least tolerance in dB that is met.
func magnitudeErrors(wanted, got []float64, tolDB float64, size int) (excess, strayedDB float64) {
	transform, modulus := response.NewTransform(size, len(wanted)), func(h complex128) float64 {
		return math.Sqrt(real(h)*real(h) + imag(h)*imag(h))
	}
	top := 0.0
	transform.Each(func(_ int, v []complex128) { top = math.Max(top, modulus(v[0])) }, response.Sequence{X: wanted})
	at := bounds{allow: fromDB(tolDB) - 1, floor: top * fromDB(FloorDB)}
	strayed := 0.0
	transform.Each(func(_ int, v []complex128) {
		at.high = modulus(v[0])
		at.low = at.high
		excess = math.Max(excess, at.excess(modulus(v[1])))
		strayed = math.Max(strayed, at.strayed(modulus(v[1])))
	}, response.Sequence{X: wanted}, response.Sequence{X: got})
	return excess, 20 * math.Log10(1+strayed)
}

// foldedKernel does the cepstral conversion on a grid of so many points and
// cuts the result to the kernel's length.
func foldedKernel(taps []float64, grid int) []float64 {
	logs := response.System{Taps: taps}.Magnitude(grid)
	floor := logFloor * slices.Max(logs)
	for k, h := range logs {
		logs[k] = math.Log(math.Max(h, floor))
	}
	return response.MinimumPhase(logs, len(taps))
}
