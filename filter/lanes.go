package filter

import (
	"slices"

	"fettle/filter/stream"
)

// lane is the channels of one stream that share a path.
type lane struct {
	path     *Path
	channels []int // from 0
	kernel   stream.Kernel
	part     [][]float64 // of a block, this lane's
}

// lanes sorts so many channels by their paths.
func (f *Filter) lanes(channels int) []*lane {
	var all []*lane
	for c := range channels {
		p := f.PathOf(c + 1)
		i := slices.IndexFunc(all, func(l *lane) bool { return l.path == p })
		if i < 0 {
			i = len(all)
			all = append(all, &lane{path: p})
		}
		all[i].channels = append(all[i].channels, c)
	}
	return all
}

// PathOf finds the path of a channel, from 1.
func (f *Filter) PathOf(channel int) *Path {
	for _, p := range f.paths {
		if p.Channel == channel {
			return p
		}
	}
	return f.paths[len(f.paths)-1]
}

// kernel makes the path's streaming kernel for some channels.
func (p *Path) kernel(channels int, run stream.Run) stream.Kernel {
	var ks []stream.Kernel
	if p.Delay > 0 {
		ks = append(ks, stream.NewDelay(p.Delay, channels))
	}
	if p.fir != nil {
		ks = append(ks, p.fir.Kernel(channels, run))
	}
	if len(p.System.Sections) > 0 {
		ks = append(ks, stream.NewCascade(p.System.Sections, channels, run.Kernel))
	}
	if len(p.System.Zero) > 0 {
		ks = append(ks, stream.NewForwardBackward(p.System.Zero, channels, run.Kernel))
	}
	return stream.Series(ks...)
}

// hops is how the path's kernel can be taken apart, nil if it cannot.
func (p *Path) hops(channels int, run stream.Run) *stream.Hops {
	if p.fir == nil || p.Delay > 0 || len(p.System.Sections) > 0 || len(p.System.Zero) > 0 {
		return nil
	}
	return p.fir.Hops(channels, run)
}

// process filters the channels of a block that are this lane's, in place.
func (l *lane) process(block [][]float64) {
	l.part = l.part[:0]
	for _, c := range l.channels {
		l.part = append(l.part, block[c])
	}
	l.kernel.Process(l.part, l.part)
}
