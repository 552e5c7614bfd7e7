package stream

import "fettle/filter/stream/internal/twiddle"

// The transform is over complex blocks of N = 2^k points, N >= 32:
//
//	X[k] = sum over n of x[n] exp(-2 pi j k n / N)
//
// going forward from natural order to bit-reversed order (place i gets X of
// i with its k bits reversed), and inversely from that order back to the
// natural one. Nothing is ever reordered.
//
// A radix-4 pass cuts a block of m points into quarters and leaves in each
// what the frequencies of one residue modulo 4 need, so that a quarter is then
// a block of its own: decimation in frequency. The inverse undoes the passes
// last to first: decimation in time. Where k is odd the outermost pass is
// radix-2. Block b of a level is seen as a polynomial modulo z^m - w^4
// (Bernstein, "Multidigit multiplication for mathematicians", 2001), so that
// all its butterflies share the factors w, w^2 and w^3, and block 0 needs none.
// One table serves all passes and all sizes.

// leaf is the largest block, in points, that is transformed pass by pass. A
// larger one is taken apart depth first: after its own pass each quarter is
// convolved to the end before the next is touched. 1024 points fill 16 KiB and
// stay in a first-level cache; 256 measures the same, 4096 slower by 5 %.
const leaf = 1024

// forward sets x to the transform of re + j im, all of one length. factors is
// twiddle.Table(len(x)/4).
func forward(x []complex128, re, im []float64, factors []twiddle.Factor) {
	for m := len(x) / load(x, re, im); m >= 4; m /= 4 {
		forwardPass(x, m, 0, factors)
	}
}

// circular convolves the block re + j im circularly and stores all but the
// first len(re)-len(yre) samples of the result, at most a quarter of them, in
// yre + j yim. spectrum is that of the impulse response, in bit-reversed order,
// times 1/N, which the inverse transform leaves out. x is for work, as long as
// the block, its contents before and after of no meaning. factors is
// twiddle.Table(len(x)/4).
func circular(yre, yim, re, im []float64, x, spectrum []complex128, factors []twiddle.Factor) {
	parts := load(x, re, im)
	n := len(x) / parts
	for b := range parts {
		convolve(x[b*n:][:n], spectrum[b*n:][:n], factors, b)
	}
	store(yre, yim, x)
}

// convolve transforms x, which is block number b of its level and a power of
// four long, multiplies it by spectrum and transforms it back.
func convolve(x, spectrum []complex128, factors []twiddle.Factor, b int) {
	m := len(x)
	if m <= leaf {
		convolveLeaf(x, spectrum, factors, b)
		return
	}
	forwardPass(x, m, b, factors)
	q := m / 4
	for i := range 4 {
		convolve(x[i*q:(i+1)*q], spectrum[i*q:(i+1)*q], factors, 4*b+i)
	}
	inversePass(x, m, b, factors)
}

func convolveLeaf(x, spectrum []complex128, factors []twiddle.Factor, b int) {
	first := b * len(x)
	for m := len(x); m > 16; m /= 4 {
		forwardPass(x, m, first/m, factors)
	}
	multiply(x, spectrum, factors, first/16)
	for m := 64; m <= len(x); m *= 4 {
		inversePass(x, m, first/m, factors)
	}
}

// multiply does the last two forward passes, the product and the first two
// inverse passes in one sweep, since all of them work within the same sixteen
// points.
func multiply(x, spectrum []complex128, factors []twiddle.Factor, b int) {
	for ; len(x) >= 16; b++ {
		multiply16((*[16]complex128)(x), (*[16]complex128)(spectrum), &factors[b], (*[4]twiddle.Factor)(factors[4*b:]))
		x, spectrum = x[16:], spectrum[16:]
	}
}

func multiply16(x, h *[16]complex128, w *twiddle.Factor, inner *[4]twiddle.Factor) {
	for i := range 4 {
		x[i], x[i+4], x[i+8], x[i+12] = split(x[i], w.W1*x[i+4], w.W2*x[i+8], w.W3*x[i+12])
	}
	for i := range inner {
		v := &inner[i]
		a, b, c, d := split(x[4*i], v.W1*x[4*i+1], v.W2*x[4*i+2], v.W3*x[4*i+3])
		a, b, c, d = join(a*h[4*i], b*h[4*i+1], c*h[4*i+2], d*h[4*i+3])
		x[4*i] = a
		x[4*i+1] = timesConj(b, v.W1)
		x[4*i+2] = timesConj(c, v.W2)
		x[4*i+3] = timesConj(d, v.W3)
	}
	for i := range 4 {
		a, b, c, d := join(x[i], x[i+4], x[i+8], x[i+12])
		x[i] = a
		x[i+4] = timesConj(b, w.W1)
		x[i+8] = timesConj(c, w.W2)
		x[i+12] = timesConj(d, w.W3)
	}
}
