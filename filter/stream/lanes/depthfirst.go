package lanes

import (
	"math/bits"

	"fettle/filter/stream/internal/twiddle"
	"fettle/filter/stream/machine"
)

// engine says who computes the passes.
type engine struct {
	kernel machine.Kernel
	lanes  int
}

// leafBytes is the most data that is transformed pass by pass. A larger block is
// taken apart depth first: after its own pass each quarter is convolved to the
// end before the next is touched, so that it stays in a near cache. 32 KiB and a
// part of the spectrum fit a first-level cache of 48 KiB.
const leafBytes = 32 << 10

// wideBytes is the least data that is taken apart by two passes at once, because
// it does not fit a second-level cache of 2 MiB. By BenchmarkConvolve 65536 points
// gain 7 % with AVX2 and 12 % with AVX-512, 262144 points 12 and 27 %. Half of
// it measures the same, twice of it loses 5 % at 262144 points.
const wideBytes = 2 << 20

// stretchBytes is how much of a row two passes at once do before they go on to
// the next stretch; sixteen of them stay in a near cache. 1 to 4 KiB measure
// alike, with 8 KiB AVX-512 loses 12 %.
const stretchBytes = 2 << 10

// points returns how many elements make so many bytes.
func (e engine) points(bytes int) int { return bytes / (16 * e.lanes) }

// convolve transforms x, which is block number b of its level, multiplies it by
// spectrum and transforms it back.
func (e engine) convolve(x []float64, spectrum []complex128, factors []twiddle.Factor, b int) {
	m := len(spectrum)
	if m <= e.points(leafBytes) {
		e.convolveLeaf(x, spectrum, factors, b)
		return
	}
	if m >= e.points(wideBytes) {
		e.splitWide(x, m, factors, b)
		e.convolveParts(x, spectrum, factors, b, 16)
		e.joinWide(x, m, factors, b)
		return
	}
	e.split4(x, m/4, m/4, 1, factors[b:])
	e.convolveParts(x, spectrum, factors, b, 4)
	e.join4(x, m/4, m/4, 1, factors[b:])
}

// convolveParts convolves each part of block b on its own.
func (e engine) convolveParts(x []float64, spectrum []complex128, factors []twiddle.Factor, b, parts int) {
	values, points := len(x)/parts, len(spectrum)/parts
	for i := range parts {
		e.convolve(x[i*values:(i+1)*values], spectrum[i*points:(i+1)*points], factors, parts*b+i)
	}
}

// splitWide splits block b of m points into quarters and these into quarters,
// and takes x from memory only once: it does both passes in one stretch of all
// sixteen rows before the next.
func (e engine) splitWide(x []float64, m int, factors []twiddle.Factor, b int) {
	n := e.points(stretchBytes)
	for at := 0; at < m/16; at += n {
		for i := range 4 {
			e.split4(e.from(x, i*m/16+at), m/4, n, 1, factors[b:])
		}
		for i := range 4 {
			e.split4(e.from(x, i*m/4+at), m/16, n, 1, factors[4*b+i:])
		}
	}
}

// joinWide undoes splitWide, but for a factor of sixteen.
func (e engine) joinWide(x []float64, m int, factors []twiddle.Factor, b int) {
	n := e.points(stretchBytes)
	for at := 0; at < m/16; at += n {
		for i := range 4 {
			e.join4(e.from(x, i*m/4+at), m/16, n, 1, factors[4*b+i:])
		}
		for i := range 4 {
			e.join4(e.from(x, i*m/16+at), m/4, n, 1, factors[b:])
		}
	}
}

// from returns x from a point on.
func (e engine) from(x []float64, point int) []float64 { return x[2*e.lanes*point:] }

// convolveLeaf does the radix-2 pass, if the size of the block is an odd power
// of two, where the data is nearest.
func (e engine) convolveLeaf(x []float64, spectrum []complex128, factors []twiddle.Factor, b int) {
	if oddPower(len(spectrum)) {
		half := len(spectrum) / 2
		e.split2(x, half, half, 1, factors[b:])
		e.convolveSmall(x, spectrum, factors, half, 2*b)
		e.join2(x, half, half, 1, factors[b:])
		return
	}
	e.convolveSmall(x, spectrum, factors, len(spectrum), b)
}

// convolveSmall convolves all the blocks of m points in x, m a power of four.
// The first is number b of its level.
func (e engine) convolveSmall(x []float64, spectrum []complex128, factors []twiddle.Factor, m, b int) {
	total, first := len(spectrum), b*m
	for s := m; s > 4; s /= 4 {
		e.split4(x, s/4, s/4, total/s, factors[first/s:])
	}
	e.product(x, total/4, spectrum, factors[first/4:])
	for s := 16; s <= m; s *= 4 {
		e.join4(x, s/4, s/4, total/s, factors[first/s:])
	}
}

func oddPower(n int) bool { return bits.TrailingZeros(uint(n))%2 == 1 }
