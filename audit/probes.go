package audit

import (
	"fmt"
	"io"
	"math"

	"fettle/audio"

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

const (
	// chirpFrom is well below the lowest band's edge (17.8 Hz), so that the
	// taper is over when the bands begin.
	chirpFrom = 8.0
	// chirpLevel keeps a probe far from any full scale; in float64 it costs
	// nothing.
	chirpLevel = 0.1
)

// chirp is an exponential sweep from chirpFrom to half the rate,
//
//	x(t) = sin(2 pi f1 L (e^(t/L) - 1)),  L = T/ln(f2/f1)
//
// (Farina 2000, AES 108th Convention). It fades in over half an octave and out
// above 0.46 of the rate, so that its ends do not ripple the spectrum by which
// the response is divided.
func chirp(rate float64, frames int) []float64 {
	f2 := rate / 2
	t := float64(frames) / rate
	l := t / math.Log(f2/chirpFrom)
	in := l * math.Ln2 / 2
	out := l * math.Log(0.5/0.46)
	x := make([]float64, frames)
	for n := range x {
		at := float64(n) / rate
		fade := taper(at/in) * taper((t-at)/out)
		x[n] = chirpLevel * fade * math.Sin(2*math.Pi*chirpFrom*l*math.Expm1(at/l))
	}
	return x
}

// taper rises from 0 to 1 over 0..1 as a squared sine.
func taper(x float64) float64 {
	if x >= 1 {
		return 1
	}
	s := math.Sin(math.Pi / 2 * math.Max(0, x))
	return s * s
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
