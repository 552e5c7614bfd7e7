package onsets

import (
	"fmt"
	"testing"

	"fettle/audio"

	goaudio "github.com/go-audio/audio"
)

// Samples a second of the original, one channel; the processed recording is
// another as many.
func BenchmarkMeasure(b *testing.B) {
	for _, rate := range []int{16000, 48000, 192000} {
		for _, every := range []float64{0.2, 1, 10} { // seconds from onset to onset
			x, _ := strikes(rate, 2e6/float64(rate), every, 1e-4)
			play := func() audio.Source {
				return audio.FromFrames(&goaudio.Format{SampleRate: rate, NumChannels: 1}, x)
			}
			b.Run(fmt.Sprintf("rate=%d/every=%g", rate, every), func(b *testing.B) {
				for b.Loop() {
					if _, err := Measure(play(), play(), Options{}); err != nil {
						b.Fatal(err)
					}
				}
				b.ReportMetric(float64(len(x))*float64(b.N)/b.Elapsed().Seconds()/1e6, "Msamples/s")
			})
		}
	}
}
