package choose

import (
	"fmt"
	"io"
	"math/rand/v2"
	"time"

	"fettle/audio"
	"fettle/filter"
	"fettle/filter/stream/machine"

	goaudio "github.com/go-audio/audio"
)

// How long a speed is measured, after the filter's own blocks are filled and the
// caches are warm.
const (
	warmFor    = 10 * time.Millisecond
	measureFor = 50 * time.Millisecond
)

// speedOf measures how many seconds of noise one goroutine filters in a second.
func speedOf(f *filter.Filter, kernel machine.Kernel) (float64, error) {
	src := newNoise(f.Rate(), channelsOf(f))
	out, err := f.ApplyWith(src, filter.Setup{Edges: filter.Silence, Kernel: kernel})
	if err != nil {
		return 0, err
	}
	if _, _, err := pull(out, warmFor); err != nil {
		return 0, err
	}
	frames, took, err := pull(out, measureFor)
	if err != nil {
		return 0, err
	}
	return float64(frames) / float64(f.Rate()) / took.Seconds(), nil
}

// pull reads for a while.
func pull(src audio.Source, atLeast time.Duration) (frames int, took time.Duration, err error) {
	buf := make([]float64, 8192*src.Format().NumChannels)
	for start := time.Now(); took < atLeast; took = time.Since(start) {
		n, err := src.ReadFrames(buf)
		if err != nil {
			return 0, 0, fmt.Errorf("the speed cannot be measured: %w", err)
		}
		frames += n
	}
	return frames, took, nil
}

// channelsOf is as many channels as the filter's stages name, at least one.
func channelsOf(f *filter.Filter) int {
	channels := 1
	for _, p := range f.Paths() {
		channels = max(channels, p.Channel)
	}
	return channels
}

// noise is a source that repeats a stretch of noise.
type noise struct {
	format  *goaudio.Format
	samples []float64 // whole frames
	at      int
	left    int64 // frames
}

// noiseFrames is longer than any speed is measured for: 6 hours at 192 kHz.
const noiseFrames = 1 << 32

func newNoise(rate, channels int) *noise {
	n := &noise{format: &goaudio.Format{SampleRate: rate, NumChannels: channels}, samples: make([]float64, 1<<14*channels), left: noiseFrames}
	random := rand.New(rand.NewPCG(7, uint64(rate)))
	for i := range n.samples {
		n.samples[i] = 0.2 * (random.Float64() - 0.5)
	}
	return n
}

func (n *noise) Format() *goaudio.Format { return n.format }
func (n *noise) Frames() int64           { return noiseFrames }

func (n *noise) ReadFrames(dst []float64) (int, error) {
	if n.left == 0 {
		return 0, io.EOF
	}
	channels := n.format.NumChannels
	frames := int(min(int64(len(dst)/channels), n.left))
	for filled := 0; filled < frames*channels; {
		copied := copy(dst[filled:frames*channels], n.samples[n.at:])
		filled += copied
		n.at = (n.at + copied) % len(n.samples)
	}
	n.left -= int64(frames)
	return frames, nil
}
