package probe

import (
	"fmt"
	"io"
	"math"
	"math/rand/v2"

	"fettle/audio"

	goaudio "github.com/go-audio/audio"
)

// Source plays the probe, from Frames frames, the same in every channel but for
// dither. Every Source of the same parameters gives the same samples. It panics
// unless p passes Check.
func (p Parameters) Source() audio.Source {
	if err := p.Check(); err != nil {
		panic(err)
	}
	return &source{
		Parameters: p,
		format:     goaudio.Format{SampleRate: p.Rate, NumChannels: p.Channels},
		once:       p.Once(1),
		random:     rand.New(rand.NewPCG(ditherSeed, uint64(p.Dither))),
	}
}

// ditherSeed makes dither the same every time; a change of it changes what files
// must hold, and so the schema.
const ditherSeed = 0x66657474

type source struct {
	Parameters
	format goaudio.Format
	once   []float64
	random *rand.Rand
	next   int64 // frame
}

func (s *source) Format() *goaudio.Format { return &s.format }

func (s *source) ReadFrames(dst []float64) (int, error) {
	channels := s.Channels
	if len(dst) == 0 || len(dst)%channels != 0 {
		panic(fmt.Sprintf("probe: a buffer of %d samples does not hold whole frames of %d channels", len(dst), channels))
	}
	n := int(min(int64(len(dst)/channels), s.Frames()-s.next))
	if n == 0 {
		return 0, io.EOF
	}
	step := math.Exp2(1 - float64(s.Dither))
	for i := range n {
		v := s.at(s.next + int64(i))
		for c := range channels {
			dst[i*channels+c] = v
			if s.Dither > 0 {
				dst[i*channels+c] += step * (s.random.Float64() - s.random.Float64())
			}
		}
	}
	s.next += int64(n)
	return n, nil
}

// at is the signal at a frame, without dither.
func (s *source) at(frame int64) float64 {
	frame -= int64(s.Lead)
	if frame < 0 {
		return 0
	}
	if within := frame % int64(s.Period); within < int64(len(s.once)) {
		return s.once[within]
	}
	return 0
}

// AlteredError says that a file is not the probe that its parameters describe.
type AlteredError struct {
	Frame int64 // of the first sample that is too far off; -1: the format or length differs
	Why   string
}

func (e *AlteredError) Error() string {
	return fmt.Sprintf("the probe is not what its parameters say: %s; make it again and play that", e.Why)
}

// Verify reads a probe file and returns *AlteredError unless it holds what the
// parameters say, as exactly as 15 bits do, or an error of reading.
func (p Parameters) Verify(file audio.Source) error {
	f := file.Format()
	if f.SampleRate != p.Rate || f.NumChannels != p.Channels || file.Frames() >= 0 && file.Frames() != p.Frames() {
		return &AlteredError{-1, fmt.Sprintf("%d frames of %d channels at %d Hz instead of %d of %d at %d Hz",
			file.Frames(), f.NumChannels, f.SampleRate, p.Frames(), p.Channels, p.Rate)}
	}
	own := p.Source()
	got, want := make([]float64, 4096*p.Channels), make([]float64, 4096*p.Channels)
	allowed := p.Amplitude()/64 + math.Exp2(-14)
	for frame := int64(0); ; {
		n, err := file.ReadFrames(got)
		if err == io.EOF {
			if frame != p.Frames() {
				return &AlteredError{frame, fmt.Sprintf("it ends at frame %d instead of %d", frame, p.Frames())}
			}
			return nil
		}
		if err != nil {
			return err
		}
		if _, err := audio.ReadFull(own, want[:n*p.Channels]); err != nil {
			return &AlteredError{frame, fmt.Sprintf("it goes on after frame %d", p.Frames())}
		}
		for i := range n * p.Channels {
			if !(math.Abs(got[i]-want[i]) <= allowed) {
				at := frame + int64(i/p.Channels)
				return &AlteredError{at, fmt.Sprintf("frame %d is %.4g instead of %.4g", at, got[i], want[i])}
			}
		}
		frame += int64(n)
	}
}
