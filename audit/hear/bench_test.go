package hear

import (
	"testing"

	"fettle/filter"
)

// BenchmarkTake of 30 s in stereo at 48 kHz, four realisations of about 16,000 taps; the
// recording is read to find its strongest onset.
func BenchmarkTake(b *testing.B) {
	const text = "stages: [{highpass: {at: 30 Hz, order: 6}}]"
	var ways []Way
	for _, as := range []filter.Realisation{filter.Linear, filter.Minimum, filter.IIR, filter.Zero} {
		ways = append(ways, way(b, text, 48000, as, 0.05))
	}
	h := newHeld(48000, 2, knocks(48000, 2, 30, 5, 15, 25))
	for b.Loop() {
		taken(b, h, ways, Options{Bytes: 2_500_000})
	}
}
