package filter

import (
	"io"
	"sync"

	"fettle/audio"
	"fettle/audio/pcm"
	"fettle/filter/stream"
	"fettle/filter/stream/lanes"
	"fettle/filter/stream/machine"
)

const (
	// chunk is how many frames are read, or filtered in order, at a time: few
	// enough to stay in a near cache.
	chunk = 4096
	// slabFrames is about how many frames a slab takes where blocks are smaller:
	// enough that passing it on costs next to nothing.
	slabFrames = 4 * chunk
)

// Slabs filters a stream slab by slab, as [Filter.ApplyWith] does. A slab is read,
// filtered, and its output read, so that several goroutines, each with a slab of its
// own, can share the work. What may be done at once, the methods say.
type Slabs struct {
	shape
	spare  *sync.Pool // of the filter
	input  *extended
	before [][]float64 // a channel: what stands before the next slab
	unit   int         // a slab ends after a multiple of so many frames
	hops   *stream.Hops
	lanes  []*lane // in place of hops: kernels with a state
	skip   int64   // frames of the kernels' output before the first to be given
	read   int64   // frames of input read
}

// shape is what slabs have to have in common to be used again.
type shape struct {
	channels     int
	history, hop int // frames before a block, and new ones of it
	count        int // blocks
	kernel       machine.Kernel
}

// Slab is a part of a stream on its way through a filter.
type Slab struct {
	shape
	blocks  [][][]float64 // a channel each: the history, then new frames
	raw     []float64     // a chunk, interleaved
	part    [][]float64   // of a block, what is filled
	scratch *lanes.Scratch
	filled  int // frames
	at, to  int // the frames still to be given
}

// Slabs begins to filter src, and fails as [Filter.Apply] does.
func (f *Filter) Slabs(src audio.Source, s Setup) (*Slabs, error) {
	format := src.Format()
	if err := f.suits(format); err != nil {
		return nil, err
	}
	out := &Slabs{shape: shape{channels: format.NumChannels, hop: chunk, kernel: s.Kernel}, spare: &f.spare, unit: 1}
	run := stream.Run{Frames: src.Frames(), Kernel: s.Kernel}
	all := f.lanes(out.channels)
	lead, tail := 0, 0
	if h := f.hops(all, run); h != nil {
		out.hops, out.history, out.hop, out.unit = h, h.History(), h.Hop(), h.Period()*h.Hop()
		lead, tail = f.align.skip(all[0].path), h.History()
	} else {
		out.lanes = all
		lead, tail = f.start(all, run)
	}
	before := 0
	if s.Edges != Silence {
		before = tail
	}
	// The last period may reach beyond the last output.
	out.input = newExtended(src, s.Edges, before, lead+out.unit)
	out.skip = int64(before + lead)
	out.before = newPlanes(out.channels, out.history)
	out.count = out.blocksFor(src.Frames())
	return out, nil
}

// hops is how a stream can be taken apart: all of it goes through one kernel without
// a state, and no output comes before its input. Otherwise it is nil.
func (f *Filter) hops(all []*lane, run stream.Run) *stream.Hops {
	first := all[0]
	if len(all) > 1 || f.align.skip(first.path) < 0 {
		return nil
	}
	return first.path.hops(len(first.channels), run)
}

// start makes the lanes' kernels and brings them in line. It returns how many
// samples they trail the output by, and how long they ring.
func (f *Filter) start(all []*lane, run stream.Run) (lead, tail int) {
	for _, l := range all {
		l.kernel = l.path.kernel(len(l.channels), run)
		lead = max(lead, f.align.skip(l.path)+l.kernel.Delay())
		tail = max(tail, l.kernel.Tail())
	}
	for _, l := range all {
		if wait := lead - f.align.skip(l.path) - l.kernel.Delay(); wait > 0 {
			l.kernel = stream.Series(l.kernel, stream.NewDelay(wait, len(l.channels)))
		}
	}
	return lead, tail
}

// blocksFor is how many blocks a slab of a stream of so many frames takes, in whole
// units.
func (s *Slabs) blocksFor(frames int64) int {
	most := int64(slabFrames)
	if frames >= 0 {
		most = min(most, s.skip+frames)
	}
	one := s.unitBlocks()
	return max(one, int(most)/(one*s.hop)*one)
}

// Independent tells whether slabs may be filtered at once, in any order.
func (s *Slabs) Independent() bool { return s.hops != nil }

// New returns memory for one slab at a time.
func (s *Slabs) New() *Slab {
	if b, ok := s.spare.Get().(*Slab); ok && b.shape == s.shape && (b.scratch != nil) == (s.hops != nil) {
		b.filled, b.at, b.to = 0, 0, 0
		return b
	}
	b := &Slab{shape: s.shape, raw: make([]float64, chunk*s.channels), part: make([][]float64, s.channels)}
	for range s.count {
		b.blocks = append(b.blocks, newPlanes(s.channels, s.history+s.hop))
	}
	if s.hops != nil {
		b.scratch = s.hops.Scratch()
	}
	return b
}

// Release gives a slab back, to be used for other streams through the filter.
func (s *Slabs) Release(b *Slab) { s.spare.Put(b) }

func newPlanes(channels, length int) [][]float64 {
	p := make([][]float64, channels)
	for c := range p {
		p[c] = make([]float64, length)
	}
	return p
}

// Read takes the next slab from the source, for one goroutine at a time. It returns
// io.EOF when there is none, and the source's own errors; then b holds nothing.
func (s *Slabs) Read(b *Slab) error {
	b.filled, b.at, b.to = 0, 0, 0
	if s.enough() {
		return io.EOF
	}
	begin := s.read
	for b.filled < s.count*s.hop && !(s.enough() && b.filled%s.unit == 0) {
		if err := s.fill(b); err != nil {
			return err
		}
	}
	for c, plane := range b.blocks[s.count-1] {
		copy(s.before[c], plane[s.hop:])
	}
	end := s.read
	if s.input.length >= 0 {
		end = min(end, s.skip+s.input.length)
	}
	b.at, b.to = int(max(0, min(s.skip, end)-begin)), int(end-begin)
	return nil
}

// enough tells whether as much was read as all of the output needs.
func (s *Slabs) enough() bool { return s.input.length >= 0 && s.read >= s.skip+s.input.length }

// fill reads a chunk into the slab.
func (s *Slabs) fill(b *Slab) error {
	i, at := b.filled/s.hop, b.filled%s.hop
	block := b.blocks[i]
	if at == 0 {
		for c, plane := range block {
			before := s.before[c]
			if i > 0 {
				before = b.blocks[i-1][c][s.hop:]
			}
			copy(plane[:b.history], before)
		}
	}
	n, err := s.input.ReadFrames(b.raw[:min(chunk, s.hop-at)*s.channels])
	if err != nil {
		return err
	}
	pcm.Separate(block, b.history+at, b.raw[:n*b.channels])
	b.filled += n
	s.read += int64(n)
	return nil
}

// Filter filters a slab that was read. Unless slabs are independent, it is for one
// goroutine at a time, in the order of Read.
func (s *Slabs) Filter(b *Slab) {
	for i := 0; i*s.hop < b.filled; i += s.unitBlocks() {
		if s.hops != nil {
			s.hops.Filter(b.blocks[i:][:s.unitBlocks()], b.scratch)
			continue
		}
		for c, plane := range b.blocks[i] {
			b.part[c] = plane[:min(s.hop, b.filled-i*s.hop)]
		}
		for _, l := range s.lanes {
			l.process(b.part)
		}
	}
}

// unitBlocks is how many blocks are filtered at once.
func (s *Slabs) unitBlocks() int { return max(1, s.unit/s.hop) }

// ReadFrames gives what a slab that was filtered came to, as a Source does.
func (b *Slab) ReadFrames(dst []float64) (int, error) {
	if b.at == b.to {
		return 0, io.EOF
	}
	i, at := b.at/b.hop, b.at%b.hop
	n := min(len(dst)/b.channels, b.to-b.at, b.hop-at)
	pcm.Interleave(dst[:n*b.channels], b.blocks[i], b.history+at)
	b.at += n
	return n, nil
}
