package filter

import (
	"io"

	"fettle/audio"
)

// extended is a source with frames put before its first and after its last:
// zeros, the outermost frame held, or the recording reflected about its
// outermost frame (which is not repeated).
type extended struct {
	src      audio.Source
	edges    Edges
	channels int
	before   int       // frames to put ahead
	started  bool      // head is made
	head     []float64 // frames still to be given before the source goes on
	ring     []float64 // the source's last frames, frame k at k mod its length
	seen     int64     // frames of the source that went by
	length   int64     // the source's length, -1 until its end is met
	past     int64     // frames given beyond the end
}

// newExtended puts before frames ahead of src and as many after it as are
// read; of those, the first after are exact and the rest need only exist.
func newExtended(src audio.Source, edges Edges, before, after int) *extended {
	e := &extended{src: src, edges: edges, channels: src.Format().NumChannels, before: before, length: -1}
	switch edges {
	case Hold:
		e.ring = make([]float64, e.channels)
	case Mirror:
		e.ring = make([]float64, (after+1)*e.channels)
	}
	return e
}

// ReadFrames fills dst with what comes next. It ends with io.EOF only for a
// source without frames; otherwise only the source's own errors end it.
func (e *extended) ReadFrames(dst []float64) (int, error) {
	if !e.started {
		if err := e.start(); err != nil {
			return 0, err
		}
	}
	if len(e.head) > 0 {
		n := copy(dst, e.head)
		e.head = e.head[n:]
		return n / e.channels, nil
	}
	if e.length < 0 {
		n, err := e.read(dst)
		if err != io.EOF {
			return n, err
		}
	}
	if e.length == 0 {
		return 0, io.EOF
	}
	e.pad(dst)
	return len(dst) / e.channels, nil
}

// read takes frames from the source and remembers the last of them.
func (e *extended) read(dst []float64) (int, error) {
	n, err := e.src.ReadFrames(dst)
	if err == io.EOF {
		e.length = e.seen
		return 0, err
	}
	if err != nil {
		return 0, err
	}
	e.remember(dst[:n*e.channels])
	return n, nil
}

func (e *extended) remember(frames []float64) {
	n := int64(len(frames) / e.channels)
	last := frames[max(0, len(frames)-len(e.ring)):]
	if size := int64(len(e.ring) / e.channels); size > 0 {
		at := int((e.seen+n-int64(len(last)/e.channels))%size) * e.channels
		fits := copy(e.ring[at:], last)
		copy(e.ring, last[fits:])
	}
	e.seen += n
}

// start makes the frames that stand ahead of the source, for which it must
// look into the source: one frame to hold, as many as are asked to mirror.
func (e *extended) start() error {
	e.started = true
	if e.before == 0 {
		return nil
	}
	want := 0
	switch e.edges {
	case Hold:
		want = 1
	case Mirror:
		want = e.before + 1
	}
	first, err := e.take(want)
	if err != nil {
		return err
	}
	have := len(first) / e.channels
	e.head = make([]float64, e.before*e.channels, (e.before+have)*e.channels)
	switch {
	case have == 0:
	case e.edges == Mirror:
		mirror(e.head, first, e.channels, int64(-e.before), int64(have))
	case e.edges == Hold:
		hold(e.head, first, e.channels)
	}
	e.head = append(e.head, first...)
	return nil
}

// take reads up to frames frames of the source.
func (e *extended) take(frames int) ([]float64, error) {
	var out []float64
	for buf := make([]float64, chunk*e.channels); len(out) < frames*e.channels; {
		n, err := e.read(buf[:min(len(buf), frames*e.channels-len(out))])
		if err == io.EOF {
			break
		}
		if err != nil {
			return nil, err
		}
		out = append(out, buf[:n*e.channels]...)
	}
	return out, nil
}

// pad fills dst with frames from beyond the source's end.
func (e *extended) pad(dst []float64) {
	switch e.edges {
	case Hold:
		hold(dst, e.ring, e.channels)
	case Mirror:
		mirror(dst, e.ring, e.channels, e.length+e.past, e.length)
	default:
		clear(dst)
	}
	e.past += int64(len(dst) / e.channels)
}

// hold fills dst with the first frame of frames.
func hold(dst, frames []float64, channels int) {
	for n := copy(dst, frames[:channels]); n < len(dst); {
		n += copy(dst[n:], dst[:n])
	}
}

// mirror fills dst with the frames of a recording of some length from index
// from on, which may lie outside it. Frame k stands in ring at k mod its length;
// those that are needed are there. It goes through the ring backward, or forward
// where the image of a short recording has turned.
func mirror(dst, ring []float64, channels int, from, length int64) {
	for len(dst) > 0 {
		k, next := reflect(from, length), reflect(from+1, length)
		n := len(dst) / channels
		if next < k {
			n = min(n, k) // down to frame 1
		} else if next > k {
			n = min(n, int(length)-1-k) // up to the last but one
		}
		copySteps(dst[:n*channels], ring, channels, k, next-k)
		dst = dst[n*channels:]
		from += int64(n)
	}
}

// copySteps fills dst with frames of a ring, from frame k on by steps of 1, -1 or
// 0, as far as the ring's end at a time.
func copySteps(dst, ring []float64, channels, k, step int) {
	size := len(ring) / channels
	for at := k % size; len(dst) > 0; {
		n := len(dst) / channels
		switch {
		case step > 0:
			n = min(n, size-at)
			copy(dst[:n*channels], ring[at*channels:])
			at = 0
		case step < 0:
			n = min(n, at+1)
			copyBackward(dst[:n*channels], ring[(at-n+1)*channels:], channels)
			at = size - 1
		default:
			hold(dst, ring[at*channels:], channels)
		}
		dst = dst[n*channels:]
	}
}

// copyBackward fills dst with the first frames of src, the last of them first.
func copyBackward(dst, src []float64, channels int) {
	for c := range channels {
		j := len(dst) - channels + c
		for i := c; i < len(dst); i += channels {
			dst[i] = src[j]
			j -= channels
		}
	}
}

// reflect maps an index outside 0..n-1 into it, mirrored about 0 and n-1 as
// often as needed.
func reflect(i, n int64) int {
	if n == 1 {
		return 0
	}
	period := 2 * (n - 1)
	if i %= period; i < 0 {
		i += period
	}
	return int(min(i, period-i))
}
