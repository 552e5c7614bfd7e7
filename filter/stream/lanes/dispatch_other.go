//go:build !amd64 || purego

package lanes

import "fettle/filter/stream/internal/twiddle"

func (e engine) split2(x []float64, step, n, count int, w []twiddle.Factor) {
	split2Generic(x, e.lanes, step, n, count, w)
}

func (e engine) join2(x []float64, step, n, count int, w []twiddle.Factor) {
	join2Generic(x, e.lanes, step, n, count, w)
}

func (e engine) split4(x []float64, step, n, count int, w []twiddle.Factor) {
	split4Generic(x, e.lanes, step, n, count, w)
}

func (e engine) join4(x []float64, step, n, count int, w []twiddle.Factor) {
	join4Generic(x, e.lanes, step, n, count, w)
}

func (e engine) product(x []float64, count int, spectrum []complex128, w []twiddle.Factor) {
	productGeneric(x, e.lanes, count, spectrum, w)
}

func (e engine) interleave4(x []float64, step int, signals *[4][]float64) {
	interleave4Generic(x, step, signals)
}

func (e engine) deinterleave4(signals *[4][]float64, x []float64, step int) {
	deinterleave4Generic(signals, x, step)
}
