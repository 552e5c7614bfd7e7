package pcm

import (
	"fmt"
	"math/rand/v2"
	"testing"

	"fettle/audio/internal/vector/vectortest"
)

// benchSamples is a buffer's worth: what a reader or writer converts at once.
const benchSamples = 1 << 14

func reportSamples(b *testing.B) {
	b.ReportMetric(float64(b.N)*benchSamples/b.Elapsed().Seconds(), "smp/s")
}

func BenchmarkDecode(b *testing.B) {
	for _, n := range named {
		b.Run(n.name, func(b *testing.B) {
			vectortest.EachBenchmark(b, func(b *testing.B) {
				dst, src := make([]float64, benchSamples), make([]byte, benchSamples*n.e.Bytes)
				for b.Loop() {
					Decode(dst, src, n.e)
				}
				reportSamples(b)
			})
		})
	}
}

func BenchmarkEncode(b *testing.B) {
	for _, n := range named {
		for _, dithered := range []bool{false, true} {
			if dithered && n.e.Float {
				continue
			}
			b.Run(fmt.Sprintf("%s/dither=%t", n.name, dithered), func(b *testing.B) {
				vectortest.EachBenchmark(b, func(b *testing.B) { benchEncode(b, n.e, dithered, 0.5) })
			})
		}
	}
}

// BenchmarkOvers encodes what is beyond full scale half of the time: every run of
// samples is left to plain Go.
func BenchmarkOvers(b *testing.B) {
	vectortest.EachBenchmark(b, func(b *testing.B) { benchEncode(b, Encoding{Bytes: 3, Bits: 24}, true, 2) })
}

func benchEncode(b *testing.B, e Encoding, dithered bool, peak float64) {
	var dither []*Dither
	if dithered {
		dither = []*Dither{NewDither([32]byte{}, "a.wav", 0), NewDither([32]byte{}, "a.wav", 1)}
	}
	q := mustQuantiser(b, e, 2, dither)
	src, dst := noise(benchSamples, peak), make([]byte, benchSamples*e.Bytes)
	for b.Loop() {
		if err := q.Encode(dst, src); err != nil {
			b.Fatal(err)
		}
	}
	reportSamples(b)
}

// noise is uniform, reproducible, of the given peak.
func noise(n int, peak float64) []float64 {
	r := rand.New(rand.NewPCG(1, 2))
	x := make([]float64, n)
	for i := range x {
		x[i] = peak * (2*r.Float64() - 1)
	}
	return x
}

func mustQuantiser(t testing.TB, e Encoding, channels int, dither []*Dither) *Quantiser {
	t.Helper()
	q, err := NewQuantiser(e, channels, dither)
	if err != nil {
		t.Fatal(err)
	}
	return q
}
