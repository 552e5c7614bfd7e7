// Package stream turns coefficients into kernels that filter a stream of any
// length, call by call, with exact state.
//
// A [Kernel] is causal: its output depends on past and present input only.
// What it is told about is samples, one float64 slice a channel, full scale
// 1.0 by convention (nothing here depends on it). Two lengths describe it.
// Its Delay is how many samples the output trails because the kernel collects
// a block before it can start; it is a matter of speed and no property of the
// filter. Its Tail is how long the filter itself rings on. To get all of a
// stream of n samples out of a kernel, feed Delay()+Tail() zeros after it and
// drop the first Delay() samples of the output.
//
// There are three kernels, and one that joins others:
//
//   - [FIR]: taps, that is a finite impulse response h[0], h[1], ..., by
//     overlap-save, or summed directly when there are few. The immutable part
//     is shared, and each stream asks it for a kernel of its own, or for [Hops],
//     which several goroutines can filter.
//   - [Cascade]: second-order sections one after another.
//   - [Delay]: whole samples.
//   - [Series]: kernels one after another.
//
// Overlap-save (Stockham 1966; Oppenheim and Schafer, "Discrete-Time Signal
// Processing", 3rd ed., section 8.7.3) cuts the input into blocks of N
// samples, each overlapping the one before by len(h)-1. The circular
// convolution of a block with h, done as a product of discrete Fourier
// transforms, differs from the linear one only in its first len(h)-1 samples;
// these are dropped and the N-len(h)+1 others, the hop, are kept.
//
// Values are not looked at. A NaN or an infinity spoils every sample of the
// block it is in, for both signals that share the block, and stays in a
// recursive section for ever: the caller keeps them out.
package stream
