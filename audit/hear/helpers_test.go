package hear

import (
	"errors"
	"io"
	"math"
	"math/rand/v2"
	"testing"

	"fettle/audio"
	"fettle/filter"
	"fettle/filter/stream/machine"

	goaudio "github.com/go-audio/audio"
)

// held is a recording in memory that counts what is read of it.
type held struct {
	format *goaudio.Format
	frames []float64
	audio.Source
	read int64
}

func newHeld(rate, channels int, frames []float64) *held {
	h := &held{format: &goaudio.Format{SampleRate: rate, NumChannels: channels}, frames: frames}
	h.SeekFrame(0)
	return h
}

func (h *held) Frames() int64 { return int64(len(h.frames) / h.format.NumChannels) }

func (h *held) SeekFrame(frame int64) error {
	h.Source = audio.FromFrames(h.format, h.frames[frame*int64(h.format.NumChannels):])
	return nil
}

func (h *held) ReadFrames(dst []float64) (int, error) {
	n, err := h.Source.ReadFrames(dst[:min(len(dst), 1000*h.format.NumChannels)])
	h.read += int64(n)
	return n, err
}

// knocks are noise with decaying bursts of a tone at some times, the last the
// loudest; channels differ.
func knocks(rate, channels int, seconds float64, at ...float64) []float64 {
	rng := rand.New(rand.NewPCG(3, 4))
	x := make([]float64, int(seconds*float64(rate))*channels)
	for i := range x {
		t := float64(i/channels) / float64(rate)
		x[i] = 1e-3*rng.NormFloat64() + 0.02*math.Sin(2*math.Pi*31*t)
		for k, begin := range at {
			if d := t - begin; d >= 0 {
				x[i] += 0.1 * float64(k+1) / float64(len(at)+i%channels) * math.Exp(-d/0.02) * math.Sin(2*math.Pi*900*d)
			}
		}
	}
	return x
}

// way realises a chain.
func way(t testing.TB, text string, rate int, as filter.Realisation, lead float64) Way {
	t.Helper()
	chain, err := filter.Parse([]byte(text), "chain.yaml")
	if err != nil {
		t.Fatal(err)
	}
	f, err := chain.Realise(rate, as)
	if err != nil {
		t.Fatal(err)
	}
	setup := f.Setup()
	setup.Kernel = machine.Portable
	return Way{Label: string(as), Filter: f, Setup: setup, Lead: lead}
}

// rendered is all of what a way makes of a recording.
func rendered(t testing.TB, h *held, w Way) []float64 {
	t.Helper()
	out, err := w.Filter.ApplyWith(audio.FromFrames(h.format, h.frames), w.Setup)
	if err != nil {
		t.Fatal(err)
	}
	var all []float64
	for buf := make([]float64, 4096*h.format.NumChannels); ; {
		n, err := out.ReadFrames(buf)
		if errors.Is(err, io.EOF) {
			return all
		}
		if err != nil {
			t.Fatal(err)
		}
		all = append(all, buf[:n*h.format.NumChannels]...)
	}
}
