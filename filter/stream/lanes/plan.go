package lanes

import (
	"fmt"
	"math/bits"
	"unsafe"

	"fettle/filter/stream/internal/twiddle"
	"fettle/filter/stream/machine"
)

// Plan convolves blocks of one size with one impulse response. It is never
// written to after New and may be used by any number of goroutines.
type Plan struct {
	engine
	size     int
	spectrum []complex128 // of the taps, bit-reversed, over N
	factors  []twiddle.Factor
}

// The sizes of a block, in points.
const (
	MinSize = 32
	MaxSize = 1 << 24
)

// New returns the plan for circular convolution, in blocks of size points, with
// the given taps: one to size of them, of any value, which are copied. size is
// a power of two from MinSize to MaxSize. New panics if it is not, if the number
// of taps is out of range, or if k does not run here.
func New(taps []float64, size int, k machine.Kernel) *Plan {
	if !k.Runs() {
		panic(fmt.Sprintf("lanes: kernel %v does not run here: take one of %s", k, machine.Names()))
	}
	return newPlan(taps, size, engine{k, Of(k)})
}

func newPlan(taps []float64, size int, e engine) *Plan {
	if size < MinSize || size > MaxSize || bits.OnesCount(uint(size)) != 1 {
		panic(fmt.Sprintf("lanes: New with blocks of %d points: a power of two from %d to %d is needed", size, MinSize, MaxSize))
	}
	if len(taps) == 0 || len(taps) > size {
		panic(fmt.Sprintf("lanes: New with %d taps for blocks of %d points: 1 to %[2]d are needed", len(taps), size))
	}
	factors := twiddle.Table(size / 4)
	return &Plan{e, size, spectrumOf(taps, size, factors), factors}
}

// spectrumOf returns the spectrum of the taps in bit-reversed order, over
// size. It does not depend on the kernel.
func spectrumOf(taps []float64, size int, factors []twiddle.Factor) []complex128 {
	x := make([]float64, 2*size) // one lane
	for i, h := range taps {
		x[2*i] = h / float64(size)
	}
	m, count := size, 1
	if oddPower(size) {
		split2Generic(x, 1, m/2, m/2, 1, factors)
		m, count = m/2, 2
	}
	for ; m >= 4; m, count = m/4, 4*count {
		split4Generic(x, 1, m/4, m/4, count, factors)
	}
	spectrum := make([]complex128, size)
	for i := range spectrum {
		spectrum[i] = complex(x[2*i], x[2*i+1])
	}
	return spectrum
}

// Of returns how many blocks a kernel takes side by side: 4 or 8.
func Of(k machine.Kernel) int {
	if k == machine.AVX512 {
		return 8
	}
	return 4
}

// Kernel returns the kernel that the plan was made for.
func (p *Plan) Kernel() machine.Kernel { return p.kernel }

// Lanes returns how many blocks one call of Convolve takes.
func (p *Plan) Lanes() int { return p.lanes }

// Size returns how many points a block has.
func (p *Plan) Size() int { return p.size }

// cacheLine is in bytes. A vector that lies across two costs twice the time.
const cacheLine = 64

// Buffer returns zeros for Convolve, where it works fastest: at the start of a
// cache line.
func (p *Plan) Buffer() []float64 {
	n := 2 * p.lanes * p.size
	b := make([]float64, n+cacheLine/8-1)
	past := int(uintptr(unsafe.Pointer(&b[0])) % cacheLine / 8)
	skip := (cacheLine/8 - past) % (cacheLine / 8)
	return b[skip : skip+n : skip+n]
}

// Convolve replaces Lanes() blocks of complex points by their circular
// convolution with the taps; so two real signals, one the real part and one the
// imaginary part of a block, are each convolved on their own. x has 2 Lanes()
// Size() values, best in a slice from Buffer: with L lanes the real part of
// point k of block l is x[2Lk+l], the imaginary part x[2Lk+L+l].
//
// The blocks do not influence each other, not even by rounding. What rounding
// carries from the real to the imaginary part of a block is of the size of what
// it does to each alone: about 2e-16 log2(N) times the Euclidean norm of the taps
// times the peak of both.
//
// It panics if x has another length.
func (p *Plan) Convolve(x []float64) {
	p.checkLength("Convolve", x)
	p.convolve(x, p.spectrum, p.factors, 0)
}

func (p *Plan) checkLength(what string, x []float64) {
	if len(x) != 2*p.lanes*p.size {
		panic(fmt.Sprintf("lanes: %s with %d values: %d blocks of %d complex points are %d", what, len(x), p.lanes, p.size, 2*p.lanes*p.size))
	}
}
