package stream

import (
	"sync"
	"sync/atomic"

	"fettle/filter/stream/lanes"
)

// overlapSave gathers a period of input, some hops of each channel, then filters
// it while the next one is gathered.
type overlapSave struct {
	plan    *lanes.Plan
	history int // taps less one
	hop     int // new samples of a block
	period  int
	filled  int           // samples of the period gathered so far
	in      [][]float64   // a channel: the history, then the period
	out     [][][]float64 // a channel, a hop: what the period before gave, after as much of no meaning as there is history
	blocks  []block       // all the blocks of one period
	next    atomic.Int64  // the next of them to be convolved
	scratch []*lanes.Scratch
	workers sync.WaitGroup
	join    []func() // a worker
}

// block says which signals are the real and imaginary part of a block.
type block struct{ re, im strand }

// strand is a hop of one channel.
type strand struct{ channel, hop int }

func newOverlapSave(plan *lanes.Plan, taps, channels int, run Run) *overlapSave {
	k := &overlapSave{plan: plan, history: taps - 1, hop: plan.Size() - taps + 1}
	workers := k.usefulWorkers(channels, run)
	hops := (1 + channels%2) * workers
	k.period = hops * k.hop
	k.in = planes(channels, k.history+k.period)
	for range channels {
		k.out = append(k.out, planes(hops, plan.Size()))
	}
	k.blocks = pairUp(channels, hops)
	for range min(workers, len(k.blocks)) {
		k.enlist()
	}
	return k
}

// usefulWorkers keeps a stream that has few hops from gathering more of them for
// its workers than it has.
func (k *overlapSave) usefulWorkers(channels int, run Run) int {
	workers := max(1, run.Workers)
	if run.Frames >= 0 {
		workers = min(workers, int(max(1, run.Frames/int64(4*k.hop*(1+channels%2)))))
	}
	return workers
}

// enlist adds a worker. It is kept as a function so that starting it allocates
// nothing.
func (k *overlapSave) enlist() {
	s := k.plan.Scratch()
	k.scratch = append(k.scratch, s)
	k.join = append(k.join, func() {
		k.work(s)
		k.workers.Done()
	})
}

// pairUp lays the hops of one period out in blocks. They do not depend on
// each other, so they may be convolved in any order, or side by side. How a hop
// is paired does not depend on how many there are.
func pairUp(channels, hops int) []block {
	var blocks []block
	for h := range hops {
		for c := 0; c+1 < channels; c += 2 {
			blocks = append(blocks, block{strand{c, h}, strand{c + 1, h}})
		}
		if last := channels - 1; channels%2 == 1 && h%2 == 0 {
			blocks = append(blocks, block{strand{last, h}, strand{last, h + 1}})
		}
	}
	return blocks
}

func (k *overlapSave) Delay() int { return k.period }
func (k *overlapSave) Tail() int  { return k.history }

func (k *overlapSave) Reset() {
	silence(k.in)
	for _, hops := range k.out {
		silence(hops)
	}
	k.filled = 0
}

func (k *overlapSave) Process(dst, src [][]float64) {
	frames := checkShape(dst, src, len(k.in))
	for from := 0; from < frames; {
		h, at := k.filled/k.hop, k.filled%k.hop
		to := min(frames, from+k.hop-at)
		for c := range src {
			copy(k.in[c][k.history+k.filled:], src[c][from:to])
			copy(dst[c][from:to], k.out[c][h][k.history+at:])
		}
		k.filled += to - from
		from = to
		if k.filled == k.period {
			k.filter()
			k.filled = 0
		}
	}
}

// filter filters the period and keeps its end as the history of the next.
func (k *overlapSave) filter() {
	k.next.Store(0)
	k.workers.Add(len(k.join) - 1)
	for _, join := range k.join[1:] {
		go join()
	}
	k.work(k.scratch[0])
	k.workers.Wait()
	for _, in := range k.in {
		copy(in, in[k.period:])
	}
}

// work convolves blocks until none is left.
func (k *overlapSave) work(s *lanes.Scratch) {
	for {
		i := int(k.next.Add(1)) - 1
		if i >= len(k.blocks) {
			return
		}
		re, im := k.blocks[i].re, k.blocks[i].im
		k.plan.Convolve(k.output(re), k.output(im), k.input(re), k.input(im), s)
	}
}

func (k *overlapSave) input(s strand) []float64 {
	return k.in[s.channel][s.hop*k.hop:][:k.plan.Size()]
}

func (k *overlapSave) output(s strand) []float64 { return k.out[s.channel][s.hop] }
