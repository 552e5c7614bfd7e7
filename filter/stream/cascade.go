package stream

import (
	"fettle/filter/response"
	"fettle/filter/stream/abreast"
	"fettle/filter/stream/machine"
)

// Cascade is a [Kernel] of second-order sections one after another; package
// abreast says how they are computed. Its Delay is 0.
//
// States that have fallen below 1e-30 are set to zero every 512 samples, counted
// from Reset, so that silence costs no more than sound.
type Cascade struct {
	sections       *abreast.Cascade
	channels, tail int
}

// cascadeBlock is after how many samples a cascade sets quiet states to zero.
const cascadeBlock = abreast.Period

// NewCascade returns a kernel for one stream of so many channels, one or more,
// computed by the given machine kernel. No sections at all give a copy of the
// input. It panics if there are no channels, if the machine kernel does not run
// here, or if a section is not stable, that is if a pole is on or outside the unit
// circle, or a coefficient is not finite.
func NewCascade(sections []response.Section, channels int, kernel machine.Kernel) *Cascade {
	checkChannels(channels)
	checkStable(sections)
	return &Cascade{
		sections: abreast.New(sections, channels, kernel),
		channels: channels,
		tail:     ringing(sections),
	}
}

// Delay returns 0.
func (k *Cascade) Delay() int { return 0 }

// Tail returns after how many samples the impulse response stays below 1e-15
// of its peak. It is an upper estimate from poles and zeros; see tail.go.
// Without poles it is exact.
func (k *Cascade) Tail() int { return k.tail }

// Reset forgets all past input.
func (k *Cascade) Reset() { k.sections.Reset() }

// Process filters the next samples; see [Kernel]. It panics unless dst and
// src hold one slice a channel, all of one length.
func (k *Cascade) Process(dst, src [][]float64) {
	checkShape(dst, src, k.channels)
	k.sections.Process(dst, src)
}
