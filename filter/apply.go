package filter

import (
	"fmt"
	"io"

	"fettle/audio"
	"fettle/filter/stream"
	"fettle/filter/stream/machine"

	goaudio "github.com/go-audio/audio"
)

// chunk is how many frames Apply moves at a time.
const chunk = 4096

// Setup says how a stream is filtered where the chain's file does not.
type Setup struct {
	// Edges are what stands before and after the recording: the chain's, but a
	// probe stands in silence, whatever a recording would.
	Edges Edges
	// Kernel is the arithmetic. Outputs are the same byte for byte only under one.
	Kernel machine.Kernel
	// Workers is how many goroutines may filter one stream at once; below 2: one.
	// The output does not depend on it.
	Workers int
}

// Setup is the usual one: the chain's edges, the best kernel that runs here, one
// goroutine.
func (f *Filter) Setup() Setup {
	return Setup{Edges: f.chain.Edges, Kernel: machine.Best(), Workers: 1}
}

// Apply filters a stream: aligned, of the same length and format. It fails
// with an error that wraps ErrForRecording when the chain names a channel
// that the stream does not have or was realised at another rate.
func (f *Filter) Apply(src audio.Source) (audio.Source, error) {
	return f.ApplyWith(src, f.Setup())
}

// ApplyWith is Apply with another setup.
func (f *Filter) ApplyWith(src audio.Source, s Setup) (audio.Source, error) {
	format := src.Format()
	if err := f.suits(format); err != nil {
		return nil, err
	}
	return f.newAligned(src, format, s), nil
}

func (f *Filter) suits(format *goaudio.Format) error {
	if format.SampleRate != f.rate {
		return &recordingError{ChainError{File: f.chain.File, Msg: fmt.Sprintf("was realised at %d Hz but the recording has %d Hz", f.rate, format.SampleRate)}}
	}
	for i, s := range f.chain.Stages {
		for _, n := range s.Channels {
			if n > format.NumChannels && s.When.Holds(float64(f.rate)) {
				return f.chain.stageError(i, fmt.Errorf("names channel %d, but the recording has %d; take it from 'channels', or treat such recordings with a chain of their own", n, format.NumChannels))
			}
		}
	}
	return nil
}

// lane is the channels of one stream that share a path.
type lane struct {
	channels []int // from 0
	kernel   stream.Kernel
	planes   [][]float64 // this lane's part of the stream's planes
	part     [][]float64 // what of them a chunk fills
}

// aligned is the Source that Apply returns.
type aligned struct {
	src    audio.Source
	input  *extended
	lanes  []lane
	raw    []float64   // one chunk, interleaved
	planes [][]float64 // one chunk, a slice a channel
	skip   int64       // frames still to be dropped
	at, n  int         // what is left of the planes: frames at to n
	out    int64       // frames given so far
}

func (f *Filter) newAligned(src audio.Source, format *goaudio.Format, s Setup) *aligned {
	a := &aligned{src: src, raw: make([]float64, chunk*format.NumChannels)}
	for range format.NumChannels {
		a.planes = append(a.planes, make([]float64, chunk))
	}
	lead, tail := 0, 0
	for _, p := range f.paths {
		var channels []int
		for c := range format.NumChannels {
			if f.PathOf(c+1) == p {
				channels = append(channels, c)
			}
		}
		if channels == nil {
			continue
		}
		k := p.kernel(len(channels), stream.Run{Frames: src.Frames(), Kernel: s.Kernel, Workers: s.Workers})
		lead = max(lead, f.align.skip(p)+k.Delay())
		tail = max(tail, k.Tail())
		a.lanes = append(a.lanes, lane{channels: channels, kernel: k})
	}
	for i := range a.lanes {
		l := &a.lanes[i]
		wait := lead - f.align.skip(f.PathOf(l.channels[0]+1)) - l.kernel.Delay()
		if wait > 0 {
			l.kernel = stream.Series(l.kernel, stream.NewDelay(wait, len(l.channels)))
		}
		for _, c := range l.channels {
			l.planes = append(l.planes, a.planes[c])
		}
		l.part = make([][]float64, len(l.planes))
	}
	before := 0
	if s.Edges != Silence {
		before = tail
	}
	a.input = newExtended(src, s.Edges, before, lead)
	a.skip = int64(before + lead)
	return a
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

func (a *aligned) Format() *goaudio.Format { return a.src.Format() }
func (a *aligned) Frames() int64           { return a.src.Frames() }

// ReadFrames pulls input until there is output to give.
func (a *aligned) ReadFrames(dst []float64) (int, error) {
	for a.at == a.n && !a.ended() {
		if err := a.fill(); err != nil {
			return 0, err
		}
	}
	if a.ended() {
		return 0, io.EOF
	}
	channels := len(a.planes)
	frames := min(len(dst)/channels, a.n-a.at)
	if end := a.input.length; end >= 0 {
		frames = int(min(int64(frames), end-a.out))
	}
	join(dst, a.planes, a.at, frames)
	a.at += frames
	a.out += int64(frames)
	return frames, nil
}

// ended tells whether as many frames went out as the source turned out to have.
func (a *aligned) ended() bool { return a.input.length >= 0 && a.out >= a.input.length }

// fill runs one chunk of input through the lanes.
func (a *aligned) fill() error {
	n, err := a.input.ReadFrames(a.raw)
	if err != nil {
		return err
	}
	separate(a.planes, a.raw, n)
	for _, l := range a.lanes {
		for i, plane := range l.planes {
			l.part[i] = plane[:n]
		}
		l.kernel.Process(l.part, l.part)
	}
	drop := min(a.skip, int64(n))
	a.skip -= drop
	a.at, a.n = int(drop), n
	return nil
}
