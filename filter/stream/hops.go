package stream

import "fettle/filter/stream/lanes"

// Hops is overlap-save taken apart: a stream cut into hops, each of which is
// filtered by itself in a block of its own, the samples before it in front. So any
// number of goroutines may filter hops of one stream at once, in any order.
type Hops struct {
	plan     *lanes.Plan
	history  int // taps less one
	hop      int // new samples of a block
	channels int
}

// Hops returns how [FIR.Kernel] would cut the same stream, or nil where that does
// not work in blocks. What comes out is the same bit for bit.
func (f *FIR) Hops(channels int, run Run) *Hops {
	checkChannels(channels)
	size := blockSize(len(f.taps), channels, run)
	if size == 0 {
		return nil
	}
	return f.hops(channels, run, size)
}

func (f *FIR) hops(channels int, run Run, size int) *Hops {
	return &Hops{plan: f.plan(size, run.Kernel), history: len(f.taps) - 1, hop: size - len(f.taps) + 1, channels: channels}
}

// Hop returns how many new samples of a channel there are in a block.
func (h *Hops) Hop() int { return h.hop }

// History returns how many samples stand before them: those before the hop, zeros
// before the first.
func (h *Hops) History() int { return h.history }

// Period returns how many hops are filtered together: one, or two for an odd
// number of channels, of which the last shares a block with its own next hop.
func (h *Hops) Period() int { return 1 + h.channels%2 }

// Scratch returns memory for one Filter at a time.
func (h *Hops) Scratch() *lanes.Scratch { return h.plan.Scratch() }

// Filter filters one period. blocks hold one slice a hop and channel, of History()
// and Hop() samples; where the hop was is then the filter's output, and what is in
// front of it means nothing. It panics if lengths are others.
func (h *Hops) Filter(blocks [][][]float64, s *lanes.Scratch) {
	for _, hop := range blocks {
		for c := 0; c+1 < h.channels; c += 2 {
			h.plan.Convolve(hop[c], hop[c+1], hop[c], hop[c+1], s)
		}
	}
	if last := h.channels - 1; h.channels%2 == 1 {
		h.plan.Convolve(blocks[0][last], blocks[1][last], blocks[0][last], blocks[1][last], s)
	}
}
