package onsets_test

import (
	"fmt"
	"log"
	"math"

	"fettle/audio"
	"fettle/audit/onsets"

	goaudio "github.com/go-audio/audio"
)

// What a delay of 24 samples does to ten strikes.
func ExampleMeasure() {
	format := &goaudio.Format{SampleRate: 48000, NumChannels: 1}
	original := make([]float64, 6*48000)
	for strike := range 10 {
		for n := range 4800 {
			t := float64(n) / 48000
			original[24000*(strike+1)+n] = 0.3 * math.Exp(-t/0.02) * math.Sin(2*math.Pi*2000*t)
		}
	}
	processed := append(make([]float64, 24), original[:len(original)-24]...)

	report, err := onsets.Measure(audio.FromFrames(format, original), audio.FromFrames(format, processed), onsets.Options{})
	if err != nil {
		log.Fatal(err)
	}
	c := report.Channels[0]
	fmt.Printf("%d onsets, later by %.3f ms, at worst by %.3f ms\n", c.Onsets, 1e3*c.Shift.Median, 1e3*c.Shift.Worst)
	fmt.Println("95th percentile:", c.NotStated["shift.percentile_95"])
	// Output:
	// 10 onsets, later by 0.500 ms, at worst by 0.500 ms
	// 95th percentile: it can be told of 10 onsets only, 20 are needed
}
