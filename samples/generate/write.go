package main

import (
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"

	goaudio "github.com/go-audio/audio"
	"github.com/go-audio/wav"
)

// pcmTag is the format category of linear PCM in a WAV header.
const pcmTag = 1

// writeWAV quantises the channels of a scene and writes them to path, making
// its folder where there is none.
func writeWAV(path string, s scene, channels [][]float64) (err error) {
	data, err := s.quantise(channels)
	if err != nil {
		return fmt.Errorf("%s: %w", path, err)
	}
	if err := os.MkdirAll(filepath.Dir(path), 0o755); err != nil {
		return fmt.Errorf("no folder for a recording: %w", err)
	}
	f, err := os.Create(path)
	if err != nil {
		return fmt.Errorf("cannot write a recording: %w", err)
	}
	defer func() { err = errors.Join(err, f.Close()) }()
	return encode(f, s, data)
}

func encode(f *os.File, s scene, data []int) error {
	e := wav.NewEncoder(f, s.rate, s.bits, len(s.channels), pcmTag)
	err := e.Write(&goaudio.IntBuffer{
		Format:         &goaudio.Format{NumChannels: len(s.channels), SampleRate: s.rate},
		Data:           data,
		SourceBitDepth: s.bits,
	})
	if err != nil {
		return fmt.Errorf("%s: cannot write samples: %w", f.Name(), err)
	}
	if err := e.Close(); err != nil {
		return fmt.Errorf("%s: cannot complete the header: %w", f.Name(), err)
	}
	return nil
}

// quantise returns the channels interleaved as integers. The encoder cannot
// dither, so that is done here, with a sequence of its own for each channel.
func (s scene) quantise(channels [][]float64) ([]int, error) {
	data := make([]int, s.frames*len(channels))
	for c, x := range channels {
		r := s.random(fmt.Sprint("dither ", c))
		for n, v := range x {
			q := dithered(v, s.bits, r)
			if limit := 1 << (s.bits - 1); q < -limit || q >= limit {
				return nil, fmt.Errorf("channel %d, frame %d: %.3f is beyond full scale; lower the levels of the scene", c+1, n, v)
			}
			data[n*len(channels)+c] = q
		}
	}
	return data, nil
}

// dithered rounds v to a step of the word length after adding triangular noise
// of two steps from peak to peak, which makes the error's mean and variance
// independent of v: S. P. Lipshitz, R. A. Wannamaker and J. Vanderkooy,
// Quantization and dither: a theoretical survey, J. Audio Eng. Soc. 40 (1992).
func dithered(v float64, bits int, r *rand.Rand) int {
	return int(math.RoundToEven(math.Ldexp(v, bits-1) + triangular(r)))
}
