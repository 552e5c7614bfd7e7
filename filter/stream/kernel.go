package stream

// Kernel filters the channels of one stream causally. It owns its state, so
// it serves one stream at a time; the coefficients behind it are shared.
//
// Blocks are the kernel's own business: calls may be of any length, and any
// split of the same input gives the same output bit for bit.
type Kernel interface {
	// Process filters the next samples. dst and src hold one slice a channel,
	// as many as the kernel was made for, all of one length. dst[c] and src[c]
	// may be the same slice but must not overlap otherwise. With y the
	// filter's output, the k-th output sample since Reset is y[k-Delay()],
	// zero before that.
	Process(dst, src [][]float64)
	// Delay is how many samples Process trails the filter's own output,
	// because it works in blocks. It is no property of the filter.
	Delay() int
	// Tail is how many samples after the last input sample the filter's own
	// output goes on: the length of its impulse response less one, for a
	// recursive filter until what is left is below 1e-15 of its peak.
	Tail() int
	// Reset forgets all past input.
	Reset()
}
