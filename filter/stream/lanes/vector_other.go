//go:build !amd64 || purego

package lanes

import "fettle/filter/stream/machine"

// vector is what assembly would convolve with.
type vector struct{}

// newVector is never called: only the portable kernel runs here.
func newVector(machine.Kernel, []complex128, []factor) *vector {
	panic("lanes: no assembly in this build")
}

func (v *vector) scratch() []float64 { return nil }

func (v *vector) scratchSize() int { return 0 }

func (v *vector) convolve(yre, yim, re, im, x []float64) {}
