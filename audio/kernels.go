package audio

import "math"

// The two functions that the meter spends its time in. x is interleaved and stride is
// the number of channels: samples of a window are stride apart, and neighbours in x
// begin neighbouring windows, whatever their channels. So eight windows at a time
// need no rearranging.
//
// The functions ...Generic are the contract. The assembly gives the same bits for
// finite samples: what it passes over cannot matter, and what it computes it rounds
// in the same places.

// extremesGeneric sets, for each chunk of so many samples from x[2*stride:] on, the
// largest |x| and the largest |Δ²x|, the second difference with the two frames
// before.
func extremesGeneric(maxima, bends, x []float64, stride, samples int) {
	for j := range maxima {
		last2, last1, now := x[:samples], x[stride:][:samples], x[2*stride:][:samples]
		var peak, bent uint64
		for i, v := range now {
			peak = max(peak, magnitude(v))
			bent = max(bent, magnitude((v-last1[i])-(last1[i]-last2[i])))
		}
		maxima[j], bends[j] = math.Float64frombits(peak>>1), math.Float64frombits(bent>>1)
		x = x[samples:]
	}
}

// pointsGeneric returns the larger of peak and what the interpolator finds in the
// windows that start in the first chunk of x. It need not look where a sketch is
// below the peak by more than it may be off.
func pointsGeneric(x []float64, stride int, near *sketch, slack slacks, peak float64) float64 {
	var alone [chunkFrames + interpolatorTaps - 1]float64
	for c := range stride {
		pick(alone[:], x[c:], stride)
		peak = pointsOf(&alone, near, slack, peak)
	}
	return peak
}

// pick copies every step-th sample.
func pick(dst, src []float64, step int) {
	j := 0
	for i := range dst {
		dst[i] = src[j]
		j += step
	}
}

// pointsOf is pointsGeneric for one channel. It chooses windows first and then
// interpolates, and it does not branch to choose: which windows it will be is hard
// to foresee.
func pointsOf(x *[chunkFrames + interpolatorTaps - 1]float64, near *sketch, slack slacks, peak float64) float64 {
	// The windows that may beat the peak at n + 2/4, and at n + 1/4 or n + 3/4.
	var middle, side [chunkFrames]int
	middles, sides := 0, 0
	m, e, o := &near.middle, &near.even, &near.odd
	middleLimit, sideLimit := peak-slack.middle, peak-slack.side
	for i := range chunkFrames {
		y := (*[2 * nearPairs]float64)(x[i+interpolatorTaps/2-nearPairs:])
		s0, s1, s2 := y[0]+y[5], y[1]+y[4], y[2]+y[3]
		d0, d1, d2 := y[0]-y[5], y[1]-y[4], y[2]-y[3]
		middle[middles], side[sides] = i, i
		middles += above(math.Abs(m[0]*s0+m[1]*s1+m[2]*s2), middleLimit)
		sides += above(math.Abs(e[0]*s0+e[1]*s1+e[2]*s2)+math.Abs(o[0]*d0+o[1]*d1+o[2]*d2), sideLimit)
	}
	for _, from := range middle[:middles] {
		if v := interpolator.middlePeak((*window)(x[from:])); v > peak {
			peak = v
		}
	}
	for _, from := range side[:sides] {
		if v := interpolator.sidePeak((*window)(x[from:])); v > peak {
			peak = v
		}
	}
	return peak
}

// above is 0 if x <= limit, else 1.
func above(x, limit float64) int {
	if x <= limit {
		return 0
	}
	return 1
}

// largest is the largest magnitude.
func largest(x []float64) float64 {
	var peak uint64
	for _, v := range x {
		peak = max(peak, magnitude(v))
	}
	return math.Float64frombits(peak >> 1)
}

// magnitude is the number of the bits of x without the sign, twice: these are
// ordered as the magnitudes are, and compare without branches.
func magnitude(x float64) uint64 { return math.Float64bits(x) << 1 }
