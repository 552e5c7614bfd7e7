package stream

import "fettle/filter/response"

// Cascade is a [Kernel] of second-order sections one after another, in
// transposed direct form II:
//
//	y[n]  = B0 x[n] + s1[n-1]
//	s1[n] = B1 x[n] - A1 y[n] + s2[n-1]
//	s2[n] = B2 x[n] - A2 y[n]
//
// (Oppenheim and Schafer, "Discrete-Time Signal Processing", 3rd ed., section
// 6.3). Its Delay is 0.
type Cascade struct {
	sections []response.Section
	states   [][]state // a channel, a section
	tail     int
	position int // samples into the current block
}

// state is what a section remembers of one channel.
type state struct{ s1, s2 float64 }

// cascadeBlock is how many samples go through one section before the next
// takes them; 2 KiB a channel stay in the first-level cache. At the end of
// each block, counted from Reset, states below quietest are set to zero.
const cascadeBlock = 256

// quietest is -600 dB full scale. Left alone, a state that decays in silence
// ends among the denormal numbers, on which processors are many times slower;
// from here no stable section gets there within a block unless its poles
// are so small that it leaves them within a few samples.
const quietest = 1e-30

// NewCascade returns a kernel for one stream of so many channels, one or more.
// The sections are copied; none at all give a copy of the input. It panics if
// there are no channels, or if a section is not stable, that is if a pole is
// on or outside the unit circle, or a coefficient is not finite.
func NewCascade(sections []response.Section, channels int) *Cascade {
	checkChannels(channels)
	checkStable(sections)
	k := &Cascade{
		sections: append([]response.Section(nil), sections...),
		states:   make([][]state, channels),
		tail:     ringing(sections),
	}
	for c := range k.states {
		k.states[c] = make([]state, len(sections))
	}
	return k
}

// Delay returns 0.
func (k *Cascade) Delay() int { return 0 }

// Tail returns after how many samples the impulse response stays below 1e-15
// of its peak. It is an upper estimate from poles and zeros; see tail.go.
// Without poles it is exact.
func (k *Cascade) Tail() int { return k.tail }

// Reset forgets all past input.
func (k *Cascade) Reset() {
	for _, states := range k.states {
		clear(states)
	}
	k.position = 0
}

// Process filters the next samples; see [Kernel]. It panics unless dst and
// src hold one slice a channel, all of one length.
func (k *Cascade) Process(dst, src [][]float64) {
	frames := checkShape(dst, src, len(k.states))
	copyPlanes(dst, src)
	for from := 0; from < frames; {
		to := min(frames, from+cascadeBlock-k.position)
		k.filter(dst, from, to)
		k.position += to - from
		from = to
		if k.position == cascadeBlock {
			k.flush()
			k.position = 0
		}
	}
}

// filter filters frames from to to in place, two channels abreast.
func (k *Cascade) filter(x [][]float64, from, to int) {
	c := 0
	for ; c+1 < len(x); c += 2 {
		filterPair(x[c][from:to], x[c+1][from:to], k.sections, k.states[c], k.states[c+1])
	}
	if c < len(x) {
		filterOne(x[c][from:to], k.sections, k.states[c])
	}
}

func (k *Cascade) flush() {
	for _, states := range k.states {
		for i, s := range states {
			states[i] = state{audible(s.s1), audible(s.s2)}
		}
	}
}

func audible(s float64) float64 {
	if -quietest < s && s < quietest {
		return 0
	}
	return s
}
