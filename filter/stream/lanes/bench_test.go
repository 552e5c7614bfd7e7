package lanes

import (
	"fmt"
	"testing"

	"fettle/filter/stream/machine"
)

// BenchmarkConvolve counts the real samples of all blocks, two a complex point,
// none of them lost to an overlap.
func BenchmarkConvolve(b *testing.B) {
	for _, k := range machine.Available() {
		for _, size := range []int{1024, 4096, 8192, 16384, 32768, 65536, 131072, 262144} {
			b.Run(fmt.Sprintf("kernel=%v/size=%d", k, size), func(b *testing.B) {
				p := New(impulse(size/4, size/4+1), size, k)
				x := p.Buffer()
				copy(x, noise(1, len(x)))
				for b.Loop() {
					p.Convolve(x)
				}
				b.ReportMetric(float64(len(x))*float64(b.N)/b.Elapsed().Seconds()/1e6, "Msamples/s")
			})
		}
	}
}
