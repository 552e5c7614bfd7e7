package abreast

import (
	"fmt"

	"fettle/filter/response"
	"fettle/filter/stream/machine"
)

// Cascade is second-order sections one after another, with what they remember of
// each channel of one stream.
type Cascade struct {
	passes   []*pass
	position int // samples since Reset, modulo Period
}

// Period is how many samples lie between two times at which quiet states are set
// to zero, see the package's documentation.
const Period = 512

// stretch is how many samples go through all passes before the next follow, so
// that they stay in the second-level cache. 4096 to 65536 measure alike; with
// less, the steps that begin and end a call show.
const stretch = 8192

// New returns a cascade at rest for so many channels, one or more. Without
// sections the output is a copy of the input. Coefficients are finite and poles
// inside the unit circle, or the output is of no use. It panics if there are no
// channels or the kernel does not run here.
func New(sections []response.Section, channels int, kernel machine.Kernel) *Cascade {
	if channels < 1 {
		panic(fmt.Sprintf("abreast: a cascade for %d channels: at least one is needed", channels))
	}
	if !kernel.Runs() {
		panic(fmt.Sprintf("abreast: kernel %v does not run here; take one of %s", kernel, machine.Names()))
	}
	return &Cascade{passes: plan(sections, channels, shapes(kernel))}
}

// Process filters the next samples. dst and src hold one slice a channel, all of
// one length, which may be 0. dst[c] and src[c] may be the same slice but must not
// overlap otherwise. Any split of the same input gives the same output bit for
// bit. Nothing is allocated.
func (k *Cascade) Process(dst, src [][]float64) {
	frames := len(src[0])
	if len(k.passes) == 0 {
		for c := range src {
			copy(dst[c], src[c])
		}
	}
	for from := 0; from < frames; from += stretch {
		to := min(frames, from+stretch)
		for _, p := range k.passes {
			p.filter(dst, src, from, to, (Period-k.position)%Period)
		}
		k.position = (k.position + to - from) % Period
	}
}

// Reset forgets all past input.
func (k *Cascade) Reset() {
	for _, p := range k.passes {
		clear(p.states())
	}
	k.position = 0
}
