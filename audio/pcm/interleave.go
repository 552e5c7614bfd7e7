package pcm

// Interleave fills dst with frames, one at least, of the channels, from sample `from`
// of each on. It panics if there are none, or if a channel is too short.
func Interleave(dst []float64, channels [][]float64, from int) {
	frames := len(dst) / len(channels)
	switch len(channels) {
	case 1:
		copy(dst, channels[0][from:][:frames])
	case 2:
		left, right := channels[0][from:][:frames], channels[1][from:][:frames]
		n := pairsBulk(dst, left, right)
		pairs(dst[2*n:], left[n:], right[n:])
	default:
		for c, x := range channels {
			spread(dst[c:], x[from:][:frames], len(channels))
		}
	}
}

// Separate undoes Interleave: each channel gets its samples in src, from sample
// `from` on. It panics as Interleave does.
func Separate(channels [][]float64, from int, src []float64) {
	frames := len(src) / len(channels)
	switch len(channels) {
	case 1:
		copy(channels[0][from:][:frames], src)
	case 2:
		left, right := channels[0][from:][:frames], channels[1][from:][:frames]
		n := unpairsBulk(left, right, src)
		unpairs(left[n:], right[n:], src[2*n:])
	default:
		for c, x := range channels {
			gather(x[from:][:frames], src[c:], len(channels))
		}
	}
}

// pairs is Interleave for two channels.
func pairs(dst, left, right []float64) {
	for i, v := range left {
		d := dst[2*i : 2*i+2 : 2*i+2]
		d[0], d[1] = v, right[i]
	}
}

// unpairs is Separate for two channels.
func unpairs(left, right, src []float64) {
	right = right[:len(left)]
	for i := range left {
		s := src[2*i : 2*i+2 : 2*i+2]
		left[i], right[i] = s[0], s[1]
	}
}

// spread sets every step-th of dst.
func spread(dst, src []float64, step int) {
	j := 0
	for _, v := range src {
		dst[j] = v
		j += step
	}
}

// gather takes every step-th of src.
func gather(dst, src []float64, step int) {
	j := 0
	for i := range dst {
		dst[i] = src[j]
		j += step
	}
}
