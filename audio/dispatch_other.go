//go:build !amd64 || purego

package audio

func extremes(maxima, bends, x []float64, stride, samples int) {
	extremesGeneric(maxima, bends, x, stride, samples)
}

func points(x []float64, stride int, near *sketch, slack slacks, peak float64) float64 {
	return pointsGeneric(x, stride, near, slack, peak)
}
