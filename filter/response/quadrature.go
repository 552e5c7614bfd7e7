package response

// PinkFrom is the lowest frequency, in Hz, that pink weights cover.
const PinkFrom = 20.0

// TopOfBand is the highest frequency that bands and pink weights cover, as a
// fraction of the sample rate.
const TopOfBand = 0.45

// EachBin visits the bins of a transform, step Hz apart, whose weighted sum is ∫ df over lo..hi, with their weights in Hz: the
// integral of the cubic through the four bins about each interval. Its error falls with the fourth power
// of the step, wherever between bins lo and hi lie.
func EachBin(step, lo, hi float64, visit func(k int, width float64)) {
	first, last := int(lo/step), int(hi/step)
	weights := make([]float64, last-first+4)
	for i := first; i <= last; i++ {
		from := max(0, lo/step-float64(i))
		to := min(1, hi/step-float64(i))
		for j, w := range cubicWeights(from, to) {
			weights[i-first+j] += w
		}
	}
	for i, w := range weights {
		visit(first-1+i, w*step)
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

// EachPink visits the bins of pink weights, the integral of df/f over 20 Hz to
// 0.45 of the rate in Hz.
func EachPink(step, rate float64, visit func(k int, pink float64)) {
	EachBin(step, PinkFrom, TopOfBand*rate, func(k int, width float64) {
		visit(k, width/(float64(k)*step))
	})
}
