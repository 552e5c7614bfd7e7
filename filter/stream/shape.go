package stream

import "fmt"

// checkShape returns how many samples a channel holds in a call of Process.
// It panics unless there is one slice a channel and all are of one length.
func checkShape(dst, src [][]float64, channels int) int {
	if len(dst) != channels || len(src) != channels {
		panic(fmt.Sprintf("stream: %d slices out and %d in for a kernel of %d channels", len(dst), len(src), channels))
	}
	frames := len(src[0])
	for c := range src {
		if len(src[c]) != frames || len(dst[c]) != frames {
			panic(fmt.Sprintf("stream: channel %d has %d samples out and %d in where the first has %d in",
				c, len(dst[c]), len(src[c]), frames))
		}
	}
	return frames
}

func checkChannels(channels int) {
	if channels < 1 {
		panic(fmt.Sprintf("stream: a kernel of %d channels: at least one is needed", channels))
	}
}

// planes returns one slice of length samples a channel.
func planes(channels, length int) [][]float64 {
	p := make([][]float64, channels)
	for c := range p {
		p[c] = make([]float64, length)
	}
	return p
}

func silence(planes [][]float64) {
	for _, p := range planes {
		clear(p)
	}
}
