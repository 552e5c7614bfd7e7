package pair

import (
	"errors"
	"io"

	"fettle/audio"
)

// Opener opens a recording at its first frame. It is called once a pass; a Source
// that is also an io.Closer is closed after it.
type Opener func() (audio.Source, error)

// reader reads a recording from front to back, a plane a channel.
type reader struct {
	src audio.Source
	buf []float64
	at  int64 // frame
}

const readFrames = 4096

func open(o Opener) (*reader, error) {
	src, err := o()
	if err != nil {
		return nil, err
	}
	return &reader{src: src, buf: make([]float64, readFrames*src.Format().NumChannels)}, nil
}

func (r *reader) close() error {
	if c, ok := r.src.(io.Closer); ok {
		return c.Close()
	}
	return nil
}

// read fills the planes with the next frames and returns how many there were: fewer
// than asked only at the end.
func (r *reader) read(planes [][]float64) (int, error) {
	channels := len(planes)
	want, done := len(planes[0]), 0
	for done < want {
		n, err := r.src.ReadFrames(r.buf[:min(readFrames, want-done)*channels])
		if errors.Is(err, io.EOF) {
			break
		}
		if err != nil {
			return 0, err
		}
		for c, p := range planes {
			for i := range n {
				p[done+i] = r.buf[i*channels+c]
			}
		}
		done += n
	}
	r.at += int64(done)
	return done, nil
}

// skip reads frames and drops them, up to frame at.
func (r *reader) skip(at int64) error {
	channels := r.src.Format().NumChannels
	for r.at < at {
		n, err := r.src.ReadFrames(r.buf[:min(readFrames, at-r.at)*int64(channels)])
		if errors.Is(err, io.EOF) {
			return nil
		}
		if err != nil {
			return err
		}
		r.at += int64(n)
	}
	return nil
}

// newPlanes makes room for frames of each channel.
func newPlanes(channels, frames int) [][]float64 {
	p := make([][]float64, channels)
	for c := range p {
		p[c] = make([]float64, frames)
	}
	return p
}
