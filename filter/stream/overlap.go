package stream

// overlapSave gathers a period of input, one or two hops of each channel,
// then filters it while the next one is gathered.
type overlapSave struct {
	fir    *FIR
	period int
	filled int         // samples of the period gathered so far
	in     [][]float64 // a channel: the last taps-1 samples, then the period
	out    [][]float64 // a channel: what the period before gave
	blocks []block     // all the blocks of one period
	work   []complex128
}

// block says which signals are the real and imaginary part of a block.
type block struct{ re, im strand }

// strand is a hop of one channel, the start-th sample of the period on.
type strand struct{ channel, start int }

func newOverlapSave(f *FIR, channels int) *overlapSave {
	hop := f.hop()
	hops := 1 + channels%2
	period := hops * hop
	return &overlapSave{
		fir:    f,
		period: period,
		in:     planes(channels, f.Taps()-1+period),
		out:    planes(channels, period),
		blocks: pairUp(channels, hops, hop),
		work:   make([]complex128, len(f.spectrum)),
	}
}

// hop is how many new samples a block takes in.
func (f *FIR) hop() int { return len(f.spectrum) - f.Taps() + 1 }

// pairUp lays the hops of one period out in blocks. They do not depend on
// each other, so they may be convolved in any order, or side by side.
func pairUp(channels, hops, hop int) []block {
	var blocks []block
	for c := 0; c+1 < channels; c += 2 {
		for h := range hops {
			blocks = append(blocks, block{strand{c, h * hop}, strand{c + 1, h * hop}})
		}
	}
	if channels%2 == 1 {
		blocks = append(blocks, block{strand{channels - 1, 0}, strand{channels - 1, hop}})
	}
	return blocks
}

func (k *overlapSave) Delay() int { return k.period }
func (k *overlapSave) Tail() int  { return k.fir.Taps() - 1 }

func (k *overlapSave) Reset() {
	silence(k.in)
	silence(k.out)
	k.filled = 0
}

func (k *overlapSave) Process(dst, src [][]float64) {
	frames := checkShape(dst, src, len(k.in))
	history := k.fir.Taps() - 1
	for from := 0; from < frames; {
		to := min(frames, from+k.period-k.filled)
		for c := range src {
			copy(k.in[c][history+k.filled:], src[c][from:to])
			copy(dst[c][from:to], k.out[c][k.filled:])
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
	size, hop := len(k.work), k.fir.hop()
	for _, b := range k.blocks {
		circular(
			k.out[b.re.channel][b.re.start:][:hop], k.out[b.im.channel][b.im.start:][:hop],
			k.in[b.re.channel][b.re.start:][:size], k.in[b.im.channel][b.im.start:][:size],
			k.work, k.fir.spectrum, k.fir.factors)
	}
	for _, in := range k.in {
		copy(in, in[k.period:])
	}
}
