//go:build !purego

package audio

import "fettle/audio/internal/vector"

//go:generate go -C _asm run ./meter -out ../kernels_amd64.s -stubs ../kernels_amd64.go -pkg audio

// The assembly checks no bounds, and takes samples and windows in groups of eight,
// which chunkFrames is a multiple of.

func extremes(maxima, bends, x []float64, stride, samples int) {
	switch vector.Used() {
	case vector.AVX512:
		extremesAVX512(&x[2*stride], stride, samples, len(maxima), &maxima[0], &bends[0])
	case vector.AVX2:
		extremesAVX2(&x[2*stride], stride, samples, len(maxima), &maxima[0], &bends[0])
	default:
		extremesGeneric(maxima, bends, x, stride, samples)
	}
}

func points(x []float64, stride int, near *sketch, slack slacks, peak float64) float64 {
	windows, h := chunkFrames*stride, &interpolator.middle[0]
	switch vector.Used() {
	case vector.AVX512:
		return pointsAVX512(&x[0], stride, windows, h, &near.middle[0], slack.middle, slack.side, peak)
	case vector.AVX2:
		return pointsAVX2(&x[0], stride, windows, h, &near.middle[0], slack.middle, slack.side, peak)
	}
	return pointsGeneric(x, stride, near, slack, peak)
}
