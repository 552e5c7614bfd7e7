package batch

import (
	"fmt"
	"math"
	"math/cmplx"

	"fettle/audio"
	"fettle/audit/pair"
	"fettle/filter"
)

// prove looks at an output before it gets its name: it is a recording of as many
// frames as were sent, and in step with the original.
func (r *rendering) prove(path string) error {
	r.plan.slots.enter()
	defer r.plan.slots.leave()
	out, err := audio.Open(path)
	if err != nil {
		return fmt.Errorf("read back, it is no recording: %w", err)
	}
	defer out.Close()
	if out.Frames() != r.entry.Frames {
		return fmt.Errorf("read back, it has %d frames instead of %d; check the disk", out.Frames(), r.entry.Frames)
	}
	return r.proveAlignment(out)
}

// mostOff is how many samples an output may be off.
const mostOff = 0.01

// proveAlignment compares windows of the original and of the output, spread over
// them, channel by channel. The record gets the channel that is worst off.
func (r *rendering) proveAlignment(out *audio.Recording) error {
	channels := out.Format().NumChannels
	alignments := make([]*pair.Alignment, channels)
	windows, length := r.windows()
	for c := range alignments {
		known := r.plan.known(r.filter, r.filter.PathOf(c+1))
		alignments[c] = pair.NewAlignment(out.Format().SampleRate, int64(len(windows))*length, known)
	}
	if err := r.compareWindows(out, windows, length, alignments); err != nil {
		return err
	}
	for c, a := range alignments {
		p := a.Result()
		if err := r.judge(p, c); err != nil {
			return err
		}
		r.enter(p)
	}
	return nil
}

// judge makes of an output that is certainly off an error.
func (r *rendering) judge(p pair.Placement, channel int) error {
	switch {
	case p.Unrelated && p.Level > r.least():
		return fmt.Errorf("channel %d is not what the chain makes of the original: %s; please report this", channel+1, p.NotStated)
	case p.NotStated == "" && p.Inverted:
		return fmt.Errorf("channel %d is inverted against what the chain makes of the original; please report this", channel+1)
	case math.Abs(p.Delay)-p.Err > mostOff:
		return fmt.Errorf("channel %d is %.3f samples (±%.3f) off its place; please report this", channel+1, p.Delay, p.Err)
	}
	return nil
}

// least is the level in dB above which an output consists of signal, not of its own
// rounding: 36 dB above a step.
func (r *rendering) least() float64 {
	bits := r.plan.encoding(r.rec).Bits
	return 36 - 20*math.Log10(2)*float64(min(bits, 24))
}

// enter keeps the channel that is worst off, one that states something before one
// that does not.
func (r *rendering) enter(p pair.Placement) {
	e := r.entry
	switch {
	case p.NotStated != "":
		if e.Alignment == nil {
			e.AlignmentNotStated = p.NotStated
		}
	case e.Alignment == nil || math.Abs(p.Delay) > math.Abs(*e.Alignment):
		e.Alignment, e.AlignmentErr, e.AlignmentNotStated = &p.Delay, finite(p.Err), ""
	}
}

func finite(x float64) *float64 {
	if math.IsNaN(x) || math.IsInf(x, 0) {
		return nil
	}
	return &x
}

// How many windows are looked at, and how many frames of each. Those of a recording
// under ten seconds are few and short, as the stretches are that are taken from them.
const (
	windows, windowFrames           = 12, 4 * pair.AlignmentSize
	shortWindows, shortWindowFrames = 4, 4096
)

// windows are where, in the output, so many frames are looked at: spread evenly over
// it, or all of it if it has no more.
func (r *rendering) windows() (starts []int64, length int64) {
	frames, count := r.entry.Frames, int64(windows)
	length = windowFrames
	if frames < int64(10*r.entry.RateHz) {
		count, length = shortWindows, shortWindowFrames
	}
	if frames <= count*length {
		return []int64{0}, frames
	}
	for i := range count {
		starts = append(starts, (2*i+1)*frames/(2*count)-length/2)
	}
	return starts, length
}

// compareWindows feeds every channel's alignment.
func (r *rendering) compareWindows(out *audio.Recording, starts []int64, length int64, to []*pair.Alignment) error {
	channels := len(to)
	buffer := takeSamples(2 * proofFrames * (channels + 1))
	defer giveSamples(buffer)
	x, y, planes := buffer[:proofFrames*channels], buffer[proofFrames*channels:][:proofFrames*channels], buffer[2*proofFrames*channels:]
	a, b := planes[:proofFrames], planes[proofFrames:]
	for _, start := range starts {
		if err := r.rec.SeekFrame(r.from + start); err != nil {
			return err
		}
		if err := out.SeekFrame(start); err != nil {
			return err
		}
		for left := length; left > 0; {
			n := int(min(left, proofFrames))
			if _, err := audio.ReadFull(r.rec, x[:n*channels]); err != nil {
				return err
			}
			if _, err := audio.ReadFull(out, y[:n*channels]); err != nil {
				return err
			}
			for c, alignment := range to {
				pick(a[:n], x, c, channels)
				pick(b[:n], y, c, channels)
				alignment.Add(a[:n], b[:n])
			}
			left -= int64(n)
		}
	}
	return nil
}

// proofFrames is how many frames are read at a time.
const proofFrames = 4096

// pick takes one channel out of interleaved frames.
func pick(plane, frames []float64, channel, channels int) {
	for i := range plane {
		plane[i] = frames[i*channels+channel]
	}
}

// known gives a path's response as outputs have it, aligned; computed once.
func (p *Plan) known(f *filter.Filter, path *filter.Path) []complex128 {
	p.mu.Lock()
	defer p.mu.Unlock()
	if p.responses[path] == nil {
		if p.responses == nil {
			p.responses = map[*filter.Path][]complex128{}
		}
		p.responses[path] = alignedResponse(f, path)
	}
	return p.responses[path]
}

// alignedResponse is at the bins of pair.AlignmentSize points. The transform is long
// enough for the whole of a kernel.
func alignedResponse(f *filter.Filter, path *filter.Path) []complex128 {
	size := pair.AlignmentSize
	for size < 2*len(path.System.Taps) {
		size *= 2
	}
	all := path.Spectrum(size)
	step := 2 * math.Pi / float64(size) * float64(f.Shift(path))
	var known []complex128
	for k := 0; k < len(all); k += size / pair.AlignmentSize {
		known = append(known, all[k]*cmplx.Rect(1, step*float64(k)))
	}
	return known
}
