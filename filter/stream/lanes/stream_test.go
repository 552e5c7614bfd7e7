package lanes_test

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"fettle/filter/stream"
	"fettle/filter/stream/lanes"
	"fettle/filter/stream/machine"
)

func noise(seed uint64, n int) []float64 {
	r := rand.New(rand.NewPCG(seed, 0))
	x := make([]float64, n)
	for i := range x {
		x[i] = 2*r.Float64() - 1
	}
	return x
}

func noisePlanes(seed uint64, count, n int) [][]float64 {
	x := make([][]float64, count)
	for i := range x {
		x[i] = noise(seed+uint64(i), n)
	}
	return x
}

// TestConvolveAgainstStream: of a signal that repeats, the linear convolution
// of package stream is the circular one from the second period on.
func TestConvolveAgainstStream(t *testing.T) {
	for _, k := range machine.Available() {
		for size := lanes.MinSize; size <= 65536; size *= 2 {
			t.Run(fmt.Sprintf("%v/%d", k, size), func(t *testing.T) {
				taps := noise(1, size/4+1)
				p := lanes.New(taps, size, k)
				x, y := p.Buffer(), noisePlanes(2, 2*p.Lanes(), size)
				p.Load(x, y)
				want := streamCircular(taps, y)
				p.Convolve(x)
				p.Store(y, x)
				for s := range y {
					// Both may err by 2^-52 log2 N |taps| |x|, |x| at most the root of
					// 2 N, for a sample; errors scatter, and a 16th is ample.
					tol := 0x1p-52 * math.Log2(float64(size)) * math.Sqrt(float64(size/4)) * math.Sqrt(2*float64(size)) / 8
					for i := range y[s] {
						if !(math.Abs(y[s][i]-want[s][i]) <= tol) {
							t.Fatalf("signal %d, sample %d: %v, want %v; off by %.3g, allowed %.3g", s, i, y[s][i], want[s][i], y[s][i]-want[s][i], tol)
						}
					}
				}
			})
		}
	}
}

func streamCircular(taps []float64, x [][]float64) [][]float64 {
	kernel, size := stream.NewFIR(taps).Kernel(len(x)), len(x[0])
	y := make([][]float64, len(x))
	for s := range x {
		y[s] = make([]float64, 2*size+kernel.Delay())
		copy(y[s], x[s])
		copy(y[s][size:], x[s])
	}
	kernel.Process(y, y)
	for s := range y {
		y[s] = y[s][size+kernel.Delay():]
	}
	return y
}

// benchSizes are blocks in points; the taps are a quarter less one, so that
// package stream takes blocks of the same size.
var benchSizes = []int{1024, 16384, 65536, 262144}

func benchTaps(size int) []float64 { return noise(1, size/4-1) }

func reportRate(b *testing.B, samples int) {
	b.ReportMetric(float64(samples)*float64(b.N)/b.Elapsed().Seconds()/1e6, "Msamples/s")
}

// BenchmarkBlock is the work of overlap-save on a stereo stream: the blocks of
// two channels are loaded, convolved and stored. It counts the real samples that
// are kept, three quarters of a block.
func BenchmarkBlock(b *testing.B) {
	for _, k := range machine.Available() {
		for _, size := range benchSizes {
			b.Run(fmt.Sprintf("kernel=%v/size=%d", k, size), func(b *testing.B) {
				p := lanes.New(benchTaps(size), size, k)
				hop := size - len(benchTaps(size)) + 1
				x, in, out := p.Buffer(), hops(p.Lanes(), hop, size), hops(p.Lanes(), hop, hop)
				for b.Loop() {
					p.Load(x, in)
					p.Convolve(x)
					p.Store(out, x)
				}
				reportRate(b, len(out)*hop)
			})
		}
	}
}

// hops returns pieces of the two channels, as many of each as there are lanes.
func hops(lanes, hop, length int) [][]float64 {
	var pieces [][]float64
	for _, channel := range noisePlanes(2, 2, (lanes-1)*hop+length) {
		for l := range lanes {
			pieces = append(pieces, channel[l*hop:][:length])
		}
	}
	return pieces
}

// BenchmarkStream is package stream's FIR kernel with the same taps and blocks,
// two channels, for the ratio.
func BenchmarkStream(b *testing.B) {
	for _, size := range benchSizes {
		b.Run(fmt.Sprintf("size=%d", size), func(b *testing.B) {
			kernel := stream.NewFIR(benchTaps(size)).Kernel(2)
			x, y := noisePlanes(2, 2, 8192), noisePlanes(3, 2, 8192)
			for b.Loop() {
				kernel.Process(y, x)
			}
			reportRate(b, 2*8192)
		})
	}
}
