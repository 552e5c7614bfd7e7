package stream

import "fmt"

// Delay is a [Kernel] that holds its input back by whole samples and changes
// nothing else. The delay is what the filter does, so it is in Tail and not
// in Delay, which is 0.
type Delay struct {
	ring [][]float64
	next int // the oldest sample, where the newest goes
}

// NewDelay returns a delay of so many samples, 0 or more, for so many
// channels, 1 or more. It panics outside these ranges.
func NewDelay(samples, channels int) *Delay {
	checkChannels(channels)
	if samples < 0 {
		panic(fmt.Sprintf("stream: NewDelay by %d samples: 0 or more are needed", samples))
	}
	return &Delay{ring: planes(channels, samples)}
}

// Delay returns 0.
func (d *Delay) Delay() int { return 0 }

// Tail returns the delay in samples.
func (d *Delay) Tail() int { return len(d.ring[0]) }

// Reset fills the delay with silence.
func (d *Delay) Reset() { silence(d.ring) }

// Process delays the next samples; see [Kernel]. It panics unless dst and src
// hold one slice a channel, all of one length.
func (d *Delay) Process(dst, src [][]float64) {
	checkShape(dst, src, len(d.ring))
	next := d.next
	for c, ring := range d.ring {
		d.next = exchange(dst[c], src[c], ring, next)
	}
}

// exchange puts src through the ring, whose oldest sample is at next, and
// returns where the oldest is then.
func exchange(dst, src, ring []float64, next int) int {
	if len(ring) == 0 {
		copy(dst, src)
		return 0
	}
	for i, x := range src {
		dst[i], ring[next] = ring[next], x
		if next++; next == len(ring) {
			next = 0
		}
	}
	return next
}
