package batch

import "sync"

// samples are buffers that one recording leaves to the next.
var samples sync.Pool

// takeSamples returns so many samples of any value.
func takeSamples(n int) []float64 {
	if b, ok := samples.Get().(*[]float64); ok && cap(*b) >= n {
		return (*b)[:n]
	}
	return make([]float64, n)
}

// giveSamples takes them back.
func giveSamples(b []float64) { samples.Put(&b) }
