package abreast

import (
	"math"

	"fettle/filter/response"
)

// shape is an arrangement of lanes that there is a function for.
type shape struct {
	sections, channels int
	chain              chain // nil: plain Go
}

// chain takes n samples, one or more, of the channels that begin at dst and src
// through the sections of a table. Before the step flush, from 0, and every Period
// steps after it, quiet states are set to zero. Nothing checks bounds.
type chain func(dst, src **float64, n, flush int, table *float64)

// pass is a shape at work: some of the sections on some of the channels.
type pass struct {
	shape
	channel  int  // the first
	first    bool // of the passes over its channels
	table    []float64
	dst, src [2]*float64 // for the chain; here because they would escape from the stack
}

// The rows of a table. A row has a value for each lane; lanes go from the last
// section to the first, and in each from the first channel to the last.
const (
	rowB0 = iota
	rowC1
	rowC2
	rowA1
	rowA2
	rowStart // -skew times the place of the section: which sample it has at step 0
	rowR
	rowQ
	rowE
	rows
)

// skew is by how many steps a section trails the one before it in a chain; the
// generator says why.
const skew = 4

// plan covers sections and channels with passes. Channels go two by two as long
// as there are two. Of the shapes, those of few sections first, the sections left
// get the first that holds them all, or else the last.
func plan(sections []response.Section, channels int, shapes []shape) []*pass {
	var passes []*pass
	for c := 0; c < channels; {
		abreast := min(2, channels-c)
		for done := 0; done < len(sections); {
			s := choose(shapes, abreast, len(sections)-done)
			part := sections[done:min(done+s.sections, len(sections))]
			passes = append(passes, newPass(s, part, c, done == 0))
			done += len(part)
		}
		c += abreast
	}
	return passes
}

func choose(shapes []shape, channels, sections int) (best shape) {
	for _, s := range shapes {
		if s.channels == channels && best.sections < sections {
			best = s
		}
	}
	return best
}

// newPass fills places without a section with one that does nothing.
func newPass(s shape, sections []response.Section, channel int, first bool) *pass {
	p := &pass{shape: s, channel: channel, first: first, table: make([]float64, rows*s.lanes())}
	for place := range s.sections {
		section := response.Section{B0: 1}
		if place < len(sections) {
			section = sections[place]
		}
		for c := range s.channels {
			p.set(p.lane(place, c), section, place)
		}
	}
	return p
}

func (s shape) lanes() int { return s.sections * s.channels }

func (s shape) lane(place, channel int) int {
	return (s.sections-1-place)*s.channels + channel
}

func (p *pass) set(lane int, s response.Section, place int) {
	*p.at(rowB0, lane) = s.B0
	*p.at(rowC1, lane) = math.FMA(-s.A1, s.B0, s.B1)
	*p.at(rowC2, lane) = math.FMA(-s.A2, s.B0, s.B2)
	*p.at(rowA1, lane) = s.A1
	*p.at(rowA2, lane) = s.A2
	*p.at(rowStart, lane) = -skew * float64(place)
}

func (p *pass) at(row, lane int) *float64 { return &p.table[row*p.lanes()+lane] }

// states is what the pass remembers.
func (p *pass) states() []float64 { return p.table[rowR*p.lanes():] }

// filter takes frames from to to of the pass's channels from src, or dst if other
// passes have been there, to dst.
func (p *pass) filter(dst, src [][]float64, from, to, flush int) {
	dst = dst[p.channel:][:p.channels]
	src = src[p.channel:][:p.channels]
	if !p.first {
		src = dst
	}
	if p.chain == nil {
		p.plain(dst, src, from, to, flush)
		return
	}
	for c := range dst {
		p.dst[c], p.src[c] = &dst[c][from], &src[c][from]
	}
	p.chain(&p.dst[0], &p.src[0], to-from, flush, &p.table[0])
	clear(p.dst[:])
	clear(p.src[:])
}
