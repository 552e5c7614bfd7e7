package audio

import (
	"errors"
	"io"

	goaudio "github.com/go-audio/audio"
)

// Source is a stream of frames that is pulled. A frame is one sample of every
// channel; samples are interleaved and full scale is 1.0.
type Source interface {
	// Format tells the sample rate in Hz and the number of channels.
	Format() *goaudio.Format
	// Frames is the length of the whole stream, or -1 when it is not known.
	Frames() int64
	// ReadFrames fills dst with up to len(dst)/channels whole frames and
	// returns how many. len(dst) must be a positive multiple of the channel
	// count. It returns io.EOF only together with 0 frames; any other error
	// also comes with 0 frames and ends the stream.
	ReadFrames(dst []float64) (frames int, err error)
}

// ReadFull reads until dst is full, and returns how many samples it filled. Of a source
// that ends before, the error is io.ErrUnexpectedEOF; others are the source's own.
func ReadFull(src Source, dst []float64) (samples int, err error) {
	for samples < len(dst) {
		frames, err := src.ReadFrames(dst[samples:])
		if errors.Is(err, io.EOF) {
			return samples, io.ErrUnexpectedEOF
		}
		if err != nil {
			return samples, err
		}
		samples += frames * src.Format().NumChannels
	}
	return samples, nil
}

// Sink takes a stream of interleaved frames and keeps all of it or nothing.
type Sink interface {
	// WriteFrames appends len(src)/channels frames.
	WriteFrames(src []float64) error
	// Commit makes what was written appear under its final name, whole and
	// synced to disk.
	Commit() error
	// Abort removes every trace. It does nothing after Commit.
	Abort() error
}
