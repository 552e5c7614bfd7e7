package audio

import goaudio "github.com/go-audio/audio"

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
