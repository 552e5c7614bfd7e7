package stream

import (
	"math"

	"fettle/filter/response"
	"fettle/filter/stream/machine"
)

// ForwardBackward is a [Kernel] that runs a cascade forward and then backward
// in time: its response is |H|^2 with no phase at all. It works in chunks. A
// chunk and a look-ahead after it are run backward from rest; the look-ahead's
// own result is thrown away and computed again with the next chunk. What that
// cuts off the backward response is below -140 dB; see LookAhead.
//
// The filter's own output y is not causal: y[n] depends on input up to
// n + LookAhead. Delay covers that and the chunk.
type ForwardBackward struct {
	forward, backward *Cascade
	lookAhead, chunk  int
	ahead             [][]float64 // forward output: chunk, then look-ahead
	have              int         // samples of ahead that are filled
	work              [][]float64 // the same, backward in time
	ready             [][]float64 // output of the last chunk, of which have - lookAhead went out
	primed            bool        // ready holds a chunk
}

// cutBackward is -140 dB: what of a full-scale signal may be lost where the
// backward run begins from rest.
const cutBackward = 1e-7

// leastChunk keeps short look-aheads from being computed twice for every few
// samples; longer ones take chunks of twice their length, so that at most half
// as much again is computed backward.
const leastChunk = 8192

// NewForwardBackward returns a kernel for one stream of so many channels, one
// or more. It panics where NewCascade does.
func NewForwardBackward(sections []response.Section, channels int, kernel machine.Kernel) *ForwardBackward {
	k := &ForwardBackward{
		forward:   NewCascade(sections, channels, kernel),
		backward:  NewCascade(sections, channels, kernel),
		lookAhead: LookAhead(sections),
	}
	k.chunk = max(leastChunk, 2*k.lookAhead)
	k.ahead = planes(channels, k.chunk+k.lookAhead)
	k.work = planes(channels, k.chunk+k.lookAhead)
	k.ready = planes(channels, k.chunk)
	return k
}

// LookAhead is how many samples of a cascade's impulse response matter to a
// backward run: the sum of |h| beyond them is below 1e-7 of the greatest gain,
// so that a signal at full scale loses less than -140 dB of it.
func LookAhead(sections []response.Section) int {
	h := response.Impulse(sections, ringing(sections)+1)
	total := 0.0
	for _, v := range h {
		total += v * v
	}
	// The greatest gain is at least the response's RMS over frequency.
	allowed := cutBackward * math.Sqrt(total)
	beyond, n := 0.0, len(h)
	for n > 0 && beyond+math.Abs(h[n-1]) <= allowed {
		n--
		beyond += math.Abs(h[n])
	}
	return n
}

// Delay returns the length of a chunk with its look-ahead.
func (k *ForwardBackward) Delay() int { return k.chunk + k.lookAhead }

// Tail returns the tail of the forward run.
func (k *ForwardBackward) Tail() int { return k.forward.Tail() }

// Reset forgets all past input.
func (k *ForwardBackward) Reset() {
	k.forward.Reset()
	k.have, k.primed = 0, false
}

// Process filters the next samples; see [Kernel]. It panics unless dst and
// src hold one slice a channel, all of one length.
func (k *ForwardBackward) Process(dst, src [][]float64) {
	frames := checkShape(dst, src, len(k.ahead))
	part := make([][]float64, 0, len(src))
	for from := 0; from < frames; {
		n := min(frames-from, k.Delay()-k.have)
		part = part[:0]
		for c, x := range k.ahead {
			copy(x[k.have:], src[c][from:from+n])
			part = append(part, x[k.have:k.have+n])
		}
		k.forward.Process(part, part)
		for c, y := range dst {
			if k.primed {
				copy(y[from:from+n], k.ready[c][k.have-k.lookAhead:])
			} else {
				clear(y[from : from+n])
			}
		}
		from += n
		if k.have += n; k.have == k.Delay() {
			k.turn()
		}
	}
}

// turn makes the next chunk of output and keeps the look-ahead, which begins
// the chunk after it.
func (k *ForwardBackward) turn() {
	for c, x := range k.ahead {
		backwards(k.work[c], x)
	}
	k.backward.Reset()
	k.backward.Process(k.work, k.work)
	for c, x := range k.ahead {
		backwards(k.ready[c], k.work[c][k.lookAhead:])
		copy(x, x[k.chunk:])
	}
	k.have, k.primed = k.lookAhead, true
}

// backwards writes src backward into dst, of the same length.
func backwards(dst, src []float64) {
	for i, v := range src {
		dst[len(src)-1-i] = v
	}
}
