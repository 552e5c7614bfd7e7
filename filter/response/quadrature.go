package response

// PinkFrom is the lowest frequency, in Hz, that pink weights cover.
const PinkFrom = 20.0

// TopOfBand is the highest frequency that bands and pink weights cover, as a
// fraction of the sample rate.
const TopOfBand = 0.45

// Quadrature makes ∫ df over lo..hi a weighted sum over the bins First to Last of a
// transform: the integral of the cubic through the four bins about each interval. Its
// error falls with the fourth power of the step, wherever between bins lo and hi lie.
type Quadrature struct {
	First, Last int

	step       float64
	inner      float64          // width of a bin that no end is near to, Hz
	head, tail [nearEnd]float64 // widths of the first and of the last bins
}

// nearEnd is how many bins from an end on have a width of their own.
const nearEnd = 4

// NewQuadrature is that over lo..hi in Hz, bins step Hz apart.
func NewQuadrature(step, lo, hi float64) Quadrature {
	first, last := int(lo/step), int(hi/step) // the intervals that hold the ends
	interval := func(i int) [4]float64 {
		return cubicWeights(max(0, lo/step-float64(i)), min(1, hi/step-float64(i)))
	}
	width := func(k int) float64 {
		var sum float64
		for i := max(first, k-2); i <= min(last, k+1); i++ {
			sum += interval(i)[k-i+1]
		}
		return sum * step
	}
	q := Quadrature{First: first - 1, Last: last + 2, step: step}
	whole := cubicWeights(0, 1)
	q.inner = (whole[3] + whole[2] + whole[1] + whole[0]) * step
	for i := range nearEnd {
		q.head[i], q.tail[i] = width(q.First+i), width(q.Last-i)
	}
	return q
}

// Width is bin k's weight in Hz, k from First to Last.
func (q *Quadrature) Width(k int) float64 {
	switch {
	case k < q.First+nearEnd:
		return q.head[k-q.First]
	case k > q.Last-nearEnd:
		return q.tail[q.Last-k]
	}
	return q.inner
}

// Pink is bin k's weight in the integral of df/f.
func (q *Quadrature) Pink(k int) float64 { return q.Width(k) / (float64(k) * q.step) }

// EachBin visits the bins of a transform, step Hz apart, whose weighted sum is ∫ df over
// lo..hi, with their weights in Hz; see Quadrature.
func EachBin(step, lo, hi float64, visit func(k int, width float64)) {
	q := NewQuadrature(step, lo, hi)
	for k := q.First; k <= q.Last; k++ {
		visit(k, q.Width(k))
	}
}

// cubicWeights integrates the cubic through the points -1, 0, 1, 2 over from..to within 0..1.
func cubicWeights(from, to float64) [4]float64 {
	if from == 0 && to == 1 {
		return [4]float64{-1. / 24, 13. / 24, 13. / 24, -1. / 24}
	}
	a, b, c := lagrange(from), lagrange((from+to)/2), lagrange(to)
	var w [4]float64
	for j := range w {
		w[j] = (to - from) / 6 * (a[j] + 4*b[j] + c[j]) // Simpson's rule is exact for cubics
	}
	return w
}

// lagrange are the basis polynomials of the points -1, 0, 1, 2 at u.
func lagrange(u float64) [4]float64 {
	return [4]float64{
		-u * (u - 1) * (u - 2) / 6,
		(u + 1) * (u - 1) * (u - 2) / 2,
		-(u + 1) * u * (u - 2) / 2,
		(u + 1) * u * (u - 1) / 6,
	}
}

// PinkQuadrature is that of pink weights, the integral of df/f over 20 Hz to 0.45 of
// the rate in Hz; see Quadrature.Pink.
func PinkQuadrature(step, rate float64) Quadrature {
	return NewQuadrature(step, PinkFrom, TopOfBand*rate)
}

// EachPink visits the bins of pink weights.
func EachPink(step, rate float64, visit func(k int, pink float64)) {
	q := PinkQuadrature(step, rate)
	for k := q.First; k <= q.Last; k++ {
		visit(k, q.Pink(k))
	}
}
