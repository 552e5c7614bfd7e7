package audio

import (
	"io"
	"sync"

	goaudio "github.com/go-audio/audio"
)

// Ahead is a Source that reads another on a goroutine of its own, some buffers
// ahead of whoever reads it. The frames are the same. Close ends it.
type Ahead struct {
	src     Source
	full    chan fetched
	empty   chan []float64
	quit    chan struct{}
	close   sync.Once
	done    sync.WaitGroup
	fetched fetched // being given out
	at      int     // samples of it that are gone
}

// fetched is what one call of ReadFrames gave: frames or an error.
type fetched struct {
	buffer  []float64
	samples int
	err     error
}

// NewAhead begins to read src in buffers of so many frames, up to depth of them
// ahead; both are 1 or more. Nobody else may use src before Close has returned.
func NewAhead(src Source, frames, depth int) *Ahead {
	a := &Ahead{src: src, full: make(chan fetched, depth+1), empty: make(chan []float64, depth+1), quit: make(chan struct{})}
	for range depth + 1 {
		a.empty <- make([]float64, frames*src.Format().NumChannels)
	}
	a.done.Go(a.run)
	return a
}

// run reads until the first error, which the end is too.
func (a *Ahead) run() {
	for {
		var p fetched
		select {
		case p.buffer = <-a.empty:
		case <-a.quit:
			return
		}
		frames, err := a.src.ReadFrames(p.buffer)
		p.samples, p.err = frames*a.src.Format().NumChannels, err
		a.full <- p // there is room for all buffers
		if err != nil {
			return
		}
	}
}

// Close stops reading and waits until src is at rest. What was read and not
// given out is lost.
func (a *Ahead) Close() {
	a.close.Do(func() { close(a.quit) })
	a.done.Wait()
}

// Format is that of the source.
func (a *Ahead) Format() *goaudio.Format { return a.src.Format() }

// Frames is that of the source.
func (a *Ahead) Frames() int64 { return a.src.Frames() }

// ReadFrames gives what was read; see Source. After Close it gives the rest of a
// fetched that was begun, then io.ErrClosedPipe.
func (a *Ahead) ReadFrames(dst []float64) (int, error) {
	for a.at == a.fetched.samples {
		if a.fetched.err != nil {
			return 0, a.fetched.err
		}
		a.next()
	}
	channels := a.src.Format().NumChannels
	checkFrames(len(dst), channels)
	n := copy(dst, a.fetched.buffer[a.at:a.fetched.samples])
	a.at += n
	return n / channels, nil
}

// next gives the buffer back and takes the next fetched.
func (a *Ahead) next() {
	if a.fetched.buffer != nil {
		a.empty <- a.fetched.buffer
	}
	a.at = 0
	select {
	case a.fetched = <-a.full:
	case <-a.quit:
		a.fetched = fetched{err: io.ErrClosedPipe}
	}
}
