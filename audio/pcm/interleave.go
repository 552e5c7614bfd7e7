package pcm

// interleave fills dst with frames, one at least, of channels that are at least so
// long.
func interleave(dst []float64, channels [][]float64) {
	frames := len(dst) / len(channels)
	switch len(channels) {
	case 1:
		copy(dst, channels[0])
	case 2:
		left, right := channels[0][:frames], channels[1][:frames]
		n := pairsBulk(dst, left, right)
		pairs(dst[2*n:], left[n:], right[n:])
	default:
		for c, x := range channels {
			spread(dst[c:], x[:frames], len(channels))
		}
	}
}

// pairs is interleave for two channels.
func pairs(dst, left, right []float64) {
	for i, v := range left {
		d := dst[2*i : 2*i+2 : 2*i+2]
		d[0], d[1] = v, right[i]
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
