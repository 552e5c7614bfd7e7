package lanes

import (
	"fmt"
	"testing"

	"fettle/filter/stream/machine"
)

// BenchmarkConvolve counts the real samples of both signals, none of them lost to
// an overlap.
func BenchmarkConvolve(b *testing.B) {
	for _, k := range machine.Available() {
		for size := 256; size <= 1<<20; size *= 2 {
			b.Run(fmt.Sprintf("kernel=%v/size=%d", k, size), func(b *testing.B) {
				p := New(impulse(size/4, size/4+1), size, k)
				re, im, yre, yim, s := noise(1, size), noise(2, size), make([]float64, size), make([]float64, size), p.Scratch()
				for b.Loop() {
					p.Convolve(yre, yim, re, im, s)
				}
				b.ReportMetric(2*float64(size)*float64(b.N)/b.Elapsed().Seconds()/1e6, "Msamples/s")
			})
		}
	}
}
