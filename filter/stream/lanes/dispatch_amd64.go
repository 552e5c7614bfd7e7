//go:build !purego

package lanes

import (
	"fettle/filter/stream/internal/twiddle"
	"fettle/filter/stream/machine"
)

//go:generate go -C _asm run . -out ../passes_amd64.s -stubs ../passes_amd64.go -pkg lanes

// The methods of engine are the passes. Nothing in the assembly checks bounds:
// step, n, count are positive and the blocks lie within x, w and spectrum.

func (e engine) split2(x []float64, step, n, count int, w []twiddle.Factor) {
	switch e.kernel {
	case machine.AVX2:
		split2AVX2(&x[0], step, n, count, &w[0].W1)
	case machine.AVX512:
		split2AVX512(&x[0], step, n, count, &w[0].W1)
	default:
		split2Generic(x, e.lanes, step, n, count, w)
	}
}

func (e engine) join2(x []float64, step, n, count int, w []twiddle.Factor) {
	switch e.kernel {
	case machine.AVX2:
		join2AVX2(&x[0], step, n, count, &w[0].W1)
	case machine.AVX512:
		join2AVX512(&x[0], step, n, count, &w[0].W1)
	default:
		join2Generic(x, e.lanes, step, n, count, w)
	}
}

func (e engine) split4(x []float64, step, n, count int, w []twiddle.Factor) {
	switch e.kernel {
	case machine.AVX2:
		split4AVX2(&x[0], step, n, count, &w[0].W1)
	case machine.AVX512:
		split4AVX512(&x[0], step, n, count, &w[0].W1)
	default:
		split4Generic(x, e.lanes, step, n, count, w)
	}
}

func (e engine) join4(x []float64, step, n, count int, w []twiddle.Factor) {
	switch e.kernel {
	case machine.AVX2:
		join4AVX2(&x[0], step, n, count, &w[0].W1)
	case machine.AVX512:
		join4AVX512(&x[0], step, n, count, &w[0].W1)
	default:
		join4Generic(x, e.lanes, step, n, count, w)
	}
}

func (e engine) product(x []float64, count int, spectrum []complex128, w []twiddle.Factor) {
	switch e.kernel {
	case machine.AVX2:
		productAVX2(&x[0], count, &spectrum[0], &w[0].W1)
	case machine.AVX512:
		productAVX512(&x[0], count, &spectrum[0], &w[0].W1)
	default:
		productGeneric(x, e.lanes, count, spectrum, w)
	}
}

func (e engine) interleave4(x []float64, step int, signals *[4][]float64) {
	n := 0
	if e.kernel != machine.Portable {
		if n = len(signals[0]) &^ 3; n > 0 {
			interleave4AVX2(&x[0], step, starts(signals), n)
		}
	}
	rest := ends(signals, n)
	interleave4Generic(x[min(step*n, len(x)):], step, &rest)
}

func (e engine) deinterleave4(signals *[4][]float64, x []float64, step int) {
	n := 0
	if e.kernel != machine.Portable {
		if n = len(signals[0]) &^ 3; n > 0 {
			deinterleave4AVX2(&x[0], step, starts(signals), n)
		}
	}
	rest := ends(signals, n)
	deinterleave4Generic(&rest, x[min(step*n, len(x)):], step)
}

func starts(signals *[4][]float64) *[4]*float64 {
	return &[4]*float64{&signals[0][0], &signals[1][0], &signals[2][0], &signals[3][0]}
}

func ends(signals *[4][]float64, n int) [4][]float64 {
	return [4][]float64{signals[0][n:], signals[1][n:], signals[2][n:], signals[3][n:]}
}
