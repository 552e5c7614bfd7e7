package audit

import (
	"fmt"
	"io"
	"math"

	"fettle/audio"
	"fettle/audit/probe"

	goaudio "github.com/go-audio/audio"
)

// played is a signal that plays in every channel.
type played struct {
	format *goaudio.Format
	signal []float64
	at     int // frames played
}

// everywhere plays one signal in every channel.
func everywhere(rate, channels int, signal []float64) audio.Source {
	return &played{format: &goaudio.Format{SampleRate: rate, NumChannels: channels}, signal: signal}
}

// impulse is a probe of silence with one sample of 1 at frame at.
func impulse(rate, channels, at, frames int) audio.Source {
	x := make([]float64, frames)
	x[at] = 1
	return everywhere(rate, channels, x)
}

func (p *played) Format() *goaudio.Format { return p.format }
func (p *played) Frames() int64           { return int64(len(p.signal)) }

func (p *played) ReadFrames(dst []float64) (int, error) {
	channels := p.format.NumChannels
	frames := min(len(dst)/channels, len(p.signal)-p.at)
	if frames == 0 {
		return 0, io.EOF
	}
	for i, v := range p.signal[p.at : p.at+frames] {
		for c := range channels {
			dst[i*channels+c] = v
		}
	}
	p.at += frames
	return frames, nil
}

// chirp is one of package probe that lasts so many frames. From 8 Hz, where it begins, to
// full level at 11.3 Hz and on is well below the lowest band's edge (17.8 Hz); it fades out
// above 0.46 of the rate, so that its ends do not ripple the spectrum by which the response
// is divided. Its level is far from any full scale; in float64 that costs nothing.
func chirp(rate, frames int) []float64 {
	p := probe.Parameters{
		Kind: probe.Chirp, Rate: rate, From: 8 * math.Sqrt2, To: 0.46 * float64(rate), Level: -20, Signal: frames,
	}
	return p.Once(1)
}

// channelOf reads a whole stream and keeps one channel (from 0).
func channelOf(src audio.Source, channel int) ([]float64, error) {
	channels := src.Format().NumChannels
	out := make([]float64, 0, max(0, src.Frames()))
	for buf := make([]float64, 8192*channels); ; {
		n, err := src.ReadFrames(buf)
		if err == io.EOF {
			return out, nil
		}
		if err != nil {
			return nil, fmt.Errorf("the audit's own probe failed: %w", err)
		}
		for i := range n {
			out = append(out, buf[i*channels+channel])
		}
	}
}
