package stream

import (
	"fmt"
	"testing"

	"fettle/filter/stream/machine"

	"gonum.org/v1/gonum/dsp/fourier"
)

// benchFrames is how many samples a channel one call of Process gets.
const benchFrames = 8192

func benchKernel(b *testing.B, k Kernel, channels int) {
	x := noisePlanes(1, channels, benchFrames)
	y := planes(channels, benchFrames)
	for b.Loop() {
		k.Process(y, x)
	}
	reportRate(b, channels*benchFrames)
}

func reportRate(b *testing.B, samples int) {
	b.ReportMetric(float64(samples)*float64(b.N)/b.Elapsed().Seconds()/1e6, "Msamples/s")
}

func BenchmarkFIR(b *testing.B) {
	for _, kernel := range machine.Available() {
		for _, taps := range []int{15, 255, 1023, 4095, 16383, 65535} {
			for _, channels := range []int{1, 2} {
				b.Run(fmt.Sprintf("kernel=%v/taps=%d/channels=%d", kernel, taps, channels), func(b *testing.B) {
					benchKernel(b, NewFIR(noise(2, taps)).Kernel(channels, Run{-1, kernel}), channels)
				})
			}
		}
	}
}

// BenchmarkGonum is overlap-save on the real transform of a general-purpose
// library, for the ratio: the same blocks, one channel at a time.
func BenchmarkGonum(b *testing.B) {
	for _, taps := range []int{255, 4095, 65535} {
		b.Run(fmt.Sprintf("taps=%d", taps), func(b *testing.B) {
			g := newGonumOverlapSave(noise(2, taps), blockSize(taps, 2, Run{-1, machine.Portable}))
			x := noise(1, len(g.block))
			y := make([]float64, g.hop)
			for b.Loop() {
				g.filter(y, x)
			}
			reportRate(b, g.hop)
		})
	}
}

type gonumOverlapSave struct {
	fft            *fourier.FFT
	spectrum, work []complex128
	block          []float64
	hop            int
}

func newGonumOverlapSave(taps []float64, size int) *gonumOverlapSave {
	g := &gonumOverlapSave{
		fft:   fourier.NewFFT(size),
		work:  make([]complex128, size/2+1),
		block: make([]float64, size),
		hop:   size - len(taps) + 1,
	}
	copy(g.block, taps)
	g.spectrum = g.fft.Coefficients(nil, g.block)
	for i := range g.spectrum {
		g.spectrum[i] /= complex(float64(size), 0)
	}
	return g
}

// filter filters one block x, its history in front, into a hop y.
func (g *gonumOverlapSave) filter(y, x []float64) {
	g.fft.Coefficients(g.work, x)
	for i, h := range g.spectrum {
		g.work[i] *= h
	}
	g.fft.Sequence(g.block, g.work)
	copy(y, g.block[len(x)-g.hop:])
}
