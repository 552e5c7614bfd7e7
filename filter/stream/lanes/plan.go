package lanes

import (
	"fmt"
	"math/bits"

	"fettle/filter/stream/machine"
)

// Plan convolves blocks of one size with one impulse response. It is never
// written to after New and may be used by any number of goroutines.
type Plan struct {
	kernel   machine.Kernel
	size     int
	portable *portable // of the two, that of the kernel
	vector   *vector
}

// The sizes of a block, in points.
const (
	MinSize = 256
	MaxSize = 1 << 24
)

// New returns the plan for circular convolution, in blocks of size points, with
// the given taps: one to size of them, of any value, which are copied. size is
// a power of two from MinSize to MaxSize. New panics if it is not, if the number
// of taps is out of range, or if k does not run here.
func New(taps []float64, size int, k machine.Kernel) *Plan {
	switch {
	case !k.Runs():
		panic(fmt.Sprintf("lanes: kernel %v does not run here: take one of %s", k, machine.Names()))
	case size < MinSize || size > MaxSize || bits.OnesCount(uint(size)) != 1:
		panic(fmt.Sprintf("lanes: New with blocks of %d points: a power of two from %d to %d is needed", size, MinSize, MaxSize))
	case len(taps) == 0 || len(taps) > size:
		panic(fmt.Sprintf("lanes: New with %d taps for blocks of %d points: 1 to %[2]d are needed", len(taps), size))
	}
	factors := table(size / 4)
	spectrum := spectrumOf(taps, size, factors)
	p := &Plan{kernel: k, size: size}
	if k == machine.Portable {
		p.portable = &portable{spectrum, factors}
	} else {
		p.vector = newVector(k, spectrum, factors)
	}
	return p
}

// spectrumOf returns the spectrum of the taps in bit-reversed order, over size.
// It does not depend on the kernel.
func spectrumOf(taps []float64, size int, factors []factor) []complex128 {
	scaled := make([]float64, size)
	for i, h := range taps {
		scaled[i] = h / float64(size)
	}
	spectrum := make([]complex128, size)
	forward(spectrum, scaled, make([]float64, size), factors)
	return spectrum
}

// Kernel returns the kernel that the plan was made for.
func (p *Plan) Kernel() machine.Kernel { return p.kernel }

// Size returns how many points a block has.
func (p *Plan) Size() int { return p.size }

// Scratch is memory for one Convolve at a time. Its contents mean nothing.
type Scratch struct {
	complex []complex128
	vector  []float64
}

// Scratch returns memory for Convolve.
func (p *Plan) Scratch() *Scratch {
	if p.vector != nil {
		return &Scratch{vector: p.vector.scratch()}
	}
	return &Scratch{complex: make([]complex128, p.size)}
}

// Convolve sets yre and yim to the circular convolutions of re and im with the
// taps. All have Size() samples; an output may be an input, but nothing may
// overlap otherwise. s is from Scratch of a plan of the same size and kernel.
//
// The two signals are the real and imaginary part of one complex block. What
// rounding carries from one to the other is of the size of what it does to each
// alone: about 2e-16 log2(N) times the Euclidean norm of the taps times the peak
// of both. It panics if a length differs.
func (p *Plan) Convolve(yre, yim, re, im []float64, s *Scratch) {
	for _, n := range [...]int{len(yre), len(yim), len(re), len(im)} {
		if n != p.size {
			panic(fmt.Sprintf("lanes: Convolve with %d samples: a block has %d", n, p.size))
		}
	}
	if p.vector != nil {
		if n := p.vector.scratchSize(); len(s.vector) < n { // the assembly would write beyond it
			panic(fmt.Sprintf("lanes: a scratch of %d samples: this plan's takes %d", len(s.vector), n))
		}
		p.vector.convolve(yre, yim, re, im, s.vector)
		return
	}
	p.portable.convolve(yre, yim, re, im, s.complex)
}
