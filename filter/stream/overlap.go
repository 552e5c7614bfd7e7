package stream

import "fettle/filter/stream/lanes"

// overlapSave gathers a period of input, then filters it while the next one is
// gathered.
type overlapSave struct {
	*Hops
	filled  int           // samples of the period gathered so far
	in      [][][]float64 // a hop, a channel: the history, then the hop
	out     [][][]float64 // the same of the period before, filtered
	scratch *lanes.Scratch
}

func newOverlapSave(h *Hops) *overlapSave {
	k := &overlapSave{Hops: h, scratch: h.Scratch()}
	for range h.Period() {
		k.in = append(k.in, planes(h.channels, h.plan.Size()))
		k.out = append(k.out, planes(h.channels, h.plan.Size()))
	}
	return k
}

func (k *overlapSave) Delay() int { return k.Period() * k.hop }
func (k *overlapSave) Tail() int  { return k.history }

func (k *overlapSave) Reset() {
	for h := range k.in {
		silence(k.in[h])
		silence(k.out[h])
	}
	k.filled = 0
}

func (k *overlapSave) Process(dst, src [][]float64) {
	frames := checkShape(dst, src, k.channels)
	for from := 0; from < frames; {
		h, at := k.filled/k.hop, k.filled%k.hop
		to := min(frames, from+k.hop-at)
		for c := range src {
			copy(k.in[h][c][k.history+at:], src[c][from:to])
			copy(dst[c][from:to], k.out[h][c][k.history+at:])
		}
		k.filled += to - from
		from = to
		if k.filled%k.hop == 0 {
			k.endHop(h)
		}
	}
}

// endHop gives the hop that was gathered to the next one as its history. After the
// last hop of a period that is the first of the next, gathered where what has been
// given out lies.
func (k *overlapSave) endHop(h int) {
	full := k.in[h]
	last := h == len(k.in)-1
	if last {
		k.in, k.out, h = k.out, k.in, -1
	}
	for c, plane := range k.in[h+1] {
		copy(plane[:k.history], full[c][k.hop:])
	}
	if last {
		k.Filter(k.out, k.scratch)
		k.filled = 0
	}
}
