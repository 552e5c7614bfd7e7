package audio

import (
	"fmt"
	"io"

	goaudio "github.com/go-audio/audio"
)

// FromFrames is a Source over interleaved samples in memory, which it neither
// copies nor changes. It panics unless len(samples) is a multiple of the
// channel count.
func FromFrames(format *goaudio.Format, samples []float64) Source {
	if format.NumChannels < 1 || len(samples)%format.NumChannels != 0 {
		panic(fmt.Sprintf("audio: %d samples are no whole frames of %d channels", len(samples), format.NumChannels))
	}
	return &memory{format: format, samples: samples}
}

type memory struct {
	format  *goaudio.Format
	samples []float64
	read    int
}

func (m *memory) Format() *goaudio.Format { return m.format }

func (m *memory) Frames() int64 { return int64(len(m.samples) / m.format.NumChannels) }

func (m *memory) ReadFrames(dst []float64) (int, error) {
	checkFrames(len(dst), m.format.NumChannels)
	n := copy(dst, m.samples[m.read:])
	if n == 0 {
		return 0, io.EOF
	}
	m.read += n
	return n / m.format.NumChannels, nil
}

// checkFrames panics unless a buffer of n samples holds at least one frame and
// whole frames only.
func checkFrames(n, channels int) {
	if n == 0 || n%channels != 0 {
		panic(fmt.Sprintf("audio: a buffer of %d samples does not hold whole frames of %d channels", n, channels))
	}
}
