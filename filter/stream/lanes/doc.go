// Package lanes convolves several blocks of a signal at once, circularly, with
// one impulse response, in double precision.
//
// A lane is one of the places of a vector register, 4 with AVX2 and 8 with
// AVX-512, and has a block of its own. Point k of all blocks stands together, as
// an element: the real parts of all lanes, then the imaginary parts. So every
// step of a transform is whole-vector loads, sums and products with a factor that
// all lanes share, and no value ever changes its place in a vector. A block is
// complex, but as the taps are real it holds two real signals that do not mix:
// its real and its imaginary part. A [Plan] thus takes 2 Lanes() signals a call.
//
// The transform is over N = 2^k points, N >= 32:
//
//	X[k] = sum over n of x[n] exp(-2 pi j k n / N)
//
// going forward from natural order to bit-reversed order, where it meets the
// spectrum of the taps in the same order and times 1/N, and back. Nothing is ever
// reordered. A radix-4 pass cuts a block into quarters, or rows, and leaves in
// each what the frequencies of one residue modulo 4 need, so that a quarter is
// then a block of its own: decimation in frequency. The inverse undoes the passes
// last to first: decimation in time. Block b of a level is seen as a polynomial
// modulo z^m - w^4 (Bernstein, "Multidigit multiplication for mathematicians",
// 2001), so that all its butterflies share the factors w, w^2 and w^3, which are
// loaded once. One table of them serves all passes and all sizes. If k is odd,
// one pass is radix-2.
//
// Passes go depth first: a quarter is convolved to the end before the next is
// touched, so that of a large block only the outermost passes meet memory.
//
// A [machine.Kernel] says who computes. The plain Go functions named ...Generic
// are what every kernel must equal up to rounding; they serve on every machine, and
// with the build tag purego they are all there is. The assembly is written by the
// program in _asm, a module of its own: run go generate after changing it.
//
// Values are not looked at. A NaN or an infinity spoils its block, both parts, but
// no other lane.
package lanes
