package pair

import (
	"sync"

	"fettle/filter/response"
)

// sliding is a window that moves over a recording.
type sliding struct {
	*reader
	planes, fresh [][]float64
}

// advance moves the window on, or fills it.
func (s *sliding) advance(first bool) error {
	if first {
		_, err := s.read(s.planes)
		return err
	}
	if _, err := s.read(s.fresh); err != nil {
		return err
	}
	for c, p := range s.planes {
		copy(p, p[len(s.fresh[c]):])
		copy(p[len(p)-len(s.fresh[c]):], s.fresh[c])
	}
	return nil
}

// windows are two recordings cut into segments that overlap by half. That of
// the original stands in the middle of twice as much, so that a response can be
// applied to it.
type windows struct {
	x, y  sliding
	size  int   // of a segment
	count int   // segments
	base  int64 // frame of the original where the first one's x begins
	next  int   // the segment after the one it is at; 0 at first
}

// openWindows opens both recordings where segments begin.
func (c *comparison) openWindows(size int) (*windows, error) {
	from, to := c.overlap()
	w := &windows{size: size, base: from, count: max(int(to-from)-size, 0) / (size / 2)}
	x, err := open(c.openOriginal)
	if err != nil {
		return nil, err
	}
	y, err := open(c.openProcessed)
	if err != nil {
		x.close()
		return nil, err
	}
	w.x = sliding{x, newPlanes(c.channels, 2*size), newPlanes(c.channels, size/2)}
	w.y = sliding{y, newPlanes(c.channels, size), newPlanes(c.channels, size/2)}
	return w, nil
}

func (w *windows) close() {
	w.x.close()
	w.y.close()
}

// moveTo goes to a segment behind the one it is at.
func (w *windows) moveTo(segment int, lag int64) error {
	const overlapping = 4 // segments that share frames of the original
	if w.next == 0 || segment-(w.next-1) >= overlapping {
		at := w.base + int64(segment)*int64(w.size/2)
		if err := w.x.skip(at); err != nil {
			return err
		}
		if err := w.y.skip(at + lag + int64(w.size/2)); err != nil {
			return err
		}
		w.next = segment + 1
		return w.advance(true)
	}
	for w.next <= segment {
		if err := w.advance(false); err != nil {
			return err
		}
		w.next++
	}
	return nil
}

func (w *windows) advance(fill bool) error {
	if err := w.x.advance(fill); err != nil {
		return err
	}
	return w.y.advance(fill)
}

// segment is a channel's segment of the original.
func (w *windows) segment(channel int) []float64 {
	return w.x.planes[channel][w.size/2 : 3*w.size/2]
}

// group is what one part of a channel adds up to.
type group struct {
	part    int     // which
	frames  float64 // sum of the segments' middles in the original
	spectra *spectra
	left    []complex128 // spectrum of the original with what the response leaves
}

// average reads both recordings once and hands every segment that sounds to visit,
// with the part of the recordings it belongs to and the frame of its middle. x is twice as long as y and about it.
// Channels are visited at the same time.
func (c *comparison) average(size int, visit func(part, channel int, middle float64, x, y []float64)) error {
	w, err := c.openWindows(size)
	if err != nil {
		return err
	}
	defer w.close()
	for part, span := range c.spans(w) {
		for i := span.from; i < span.to; i++ {
			if err := w.moveTo(i, c.lag); err != nil {
				return err
			}
			middle := float64(w.base) + float64(w.size) + float64(i)*float64(w.size/2)
			var wait sync.WaitGroup
			for ch := range c.channels {
				if c.sounds(w.segment(ch)) {
					wait.Go(func() { visit(part, ch, middle, w.x.planes[ch], w.y.planes[ch]) })
				}
			}
			wait.Wait()
		}
	}
	return nil
}

// span is a run of segments.
type span struct{ from, to int }

// mostSegments is how many segments of a long recording are looked at: the loudest run of
// each of its parts.
const mostSegments = 120

// spans are the runs of segments that stand for the parts.
func (c *comparison) spans(w *windows) []span {
	parts := min(mostGroups, max(w.count/leastSegments, 1))
	var list []span
	for p := range parts {
		from, to := w.count*p/parts, w.count*(p+1)/parts
		run := min(to-from, mostSegments/parts)
		best, most := from, -1.0
		for i := from; i+run <= to; i++ {
			at := w.base + int64(i+1)*int64(w.size/2)
			if e := c.original.between(at, at+int64(run+1)*int64(w.size/2)); e > most {
				best, most = i, e
			}
		}
		list = append(list, span{best, best + run})
	}
	return list
}

// sounds tells whether a segment is loud enough to tell something.
func (c *comparison) sounds(x []float64) bool {
	var energy, loudest float64
	for _, v := range x {
		energy += v * v
	}
	for _, v := range c.original.loud {
		loudest = max(loudest, v)
	}
	// The envelope's frames overlap by half.
	mean := loudest / 2 / float64(c.original.frames) * float64(len(x))
	return energy > silence*mean
}

// segmentSize is as long as resolves the lowest band, and short enough for some
// segments a group.
func (c *comparison) segmentSize() int {
	from, to := c.overlap()
	size := response.NextPow2(int(segmentSeconds * float64(c.rate)))
	for size > 1024 && (to-from)/int64(size/2) < (mostGroups+2)*leastSegments {
		size /= 2
	}
	return size
}
