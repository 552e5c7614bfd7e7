package choose

import (
	"testing"

	"fettle/filter/stream/machine"
)

// sixteenThousand is a chain whose symmetric kernel has 16,205 taps at 48 kHz.
const sixteenThousand = `phase: linear
stages:
  - highpass: {at: 60 Hz, order: 4}
  - notch: {at: 50 Hz, width: 19 Hz}
  - bell: {at: 3 kHz, gain: 2 dB, q: 0.9}
  - lowpass: {pass: 15 kHz, stop: 17 kHz, reject: 70 dB, family: kaiser}
`

// BenchmarkCompare sets four realisations side by side, all but their speed.
func BenchmarkCompare(b *testing.B) {
	r := Request{
		Chains: []Chain{chainOf(b, sixteenThousand)}, Names: []string{"linear", "minimum", "iir", "zero"},
		Rate: 48000, Kernel: machine.Best(),
	}
	b.ReportAllocs()
	for b.Loop() {
		if _, err := Compare(r); err != nil {
			b.Fatal(err)
		}
	}
}

// BenchmarkCompareSamples sets all usual realisations of the sample chains side by side.
func BenchmarkCompareSamples(b *testing.B) {
	for _, name := range []string{"interviews", "deck"} {
		b.Run(name, func(b *testing.B) {
			c, err := Load("../../samples/chains/" + name + ".yaml")
			if err != nil {
				b.Fatal(err)
			}
			for b.Loop() {
				if _, err := Compare(Request{Chains: []Chain{c}, Names: Usual, Rate: 48000, Kernel: machine.Best()}); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
