package filter_test

import (
	"fmt"
	"io"
	"log"

	"fettle/audio"
	"fettle/filter"

	goaudio "github.com/go-audio/audio"
)

// A chain is parsed once, realised once for each sample rate, and applied to
// any number of recordings. What comes out has the length of what went in, and
// a click stays where it was.
func Example() {
	chain, err := filter.Parse([]byte(`
name: click track
phase: linear
stages:
  - lowpass: {at: 2 kHz, order: 2}
  - gain: {by: 6 dB}
`), "clicks.yaml")
	if err != nil {
		log.Fatal(err)
	}
	f, err := chain.Realise(8000, filter.Written)
	if err != nil {
		log.Fatal(err)
	}

	click := make([]float64, 100)
	click[40] = 0.5
	out, err := f.Apply(audio.FromFrames(&goaudio.Format{SampleRate: 8000, NumChannels: 1}, click))
	if err != nil {
		log.Fatal(err)
	}

	var samples []float64
	for buf := make([]float64, 32); ; {
		n, err := out.ReadFrames(buf)
		if err == io.EOF {
			break
		}
		if err != nil {
			log.Fatal(err)
		}
		samples = append(samples, buf[:n]...)
	}
	fmt.Printf("%s: %d frames\n", chain.Name, len(samples))
	for n := 38; n <= 42; n++ {
		fmt.Printf("frame %d: %+.3f\n", n, samples[n])
	}
	// Output:
	// click track: 100 frames
	// frame 38: -0.051
	// frame 39: +0.269
	// frame 40: +0.589
	// frame 41: +0.269
	// frame 42: -0.051
}
