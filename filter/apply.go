package filter

import (
	"fmt"
	"io"

	"fettle/audio"
	"fettle/filter/stream/machine"

	goaudio "github.com/go-audio/audio"
)

// Setup says how a stream is filtered where the chain's file does not.
type Setup struct {
	// Edges are what stands before and after the recording: the chain's, but a
	// probe stands in silence, whatever a recording would.
	Edges Edges
	// Kernel is the arithmetic. Outputs are the same byte for byte only under one.
	Kernel machine.Kernel
}

// Setup is the usual one: the chain's edges, the best kernel that runs here.
func (f *Filter) Setup() Setup { return Setup{Edges: f.chain.Edges, Kernel: machine.Best()} }

// Apply filters a stream: aligned, of the same length and format. It fails
// with an error that wraps ErrForRecording when the chain names a channel
// that the stream does not have or was realised at another rate.
func (f *Filter) Apply(src audio.Source) (audio.Source, error) {
	return f.ApplyWith(src, f.Setup())
}

// ApplyWith is Apply with another setup.
func (f *Filter) ApplyWith(src audio.Source, s Setup) (audio.Source, error) {
	slabs, err := f.Slabs(src, s)
	if err != nil {
		return nil, err
	}
	return &aligned{src: src, slabs: slabs, slab: slabs.New()}, nil
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

// aligned is the Source that Apply returns.
type aligned struct {
	src   audio.Source
	slabs *Slabs
	slab  *Slab // in hand
}

func (a *aligned) Format() *goaudio.Format { return a.src.Format() }
func (a *aligned) Frames() int64           { return a.src.Frames() }

// ReadFrames pulls input until there is output to give.
func (a *aligned) ReadFrames(dst []float64) (int, error) {
	for {
		n, err := a.slab.ReadFrames(dst)
		if err != io.EOF {
			return n, err
		}
		if err := a.slabs.Read(a.slab); err != nil {
			return 0, err
		}
		a.slabs.Filter(a.slab)
	}
}
