package hear

import (
	"fmt"
	"math"

	"fettle/audio"
	"fettle/audio/container"
	"fettle/audio/pcm"
	"fettle/filter"

	goaudio "github.com/go-audio/audio"
)

// encoding is what every browser plays.
var encoding = pcm.Encoding{Bytes: 2, Bits: 16}

// encode makes a WAV file of a player's frames. Equal chains and labels have equal
// dither.
func encode(frames []float64, s span, chain [32]byte, label string) ([]byte, error) {
	spec := audio.Spec{Rate: s.rate, Channels: len(s.channels), Encoding: encoding}
	file, err := container.Header(spec.Format(), nil, int64(len(frames)/spec.Channels))
	if err != nil {
		return nil, err
	}
	for c := range spec.Channels {
		spec.Dither = append(spec.Dither, pcm.NewDither(chain, "excerpt of "+label, c))
	}
	q, err := pcm.NewQuantiser(encoding, spec.Channels, spec.Dither)
	if err != nil {
		return nil, err
	}
	samples := make([]byte, len(frames)*encoding.Bytes)
	if err := q.Encode(samples, frames); err != nil {
		return nil, fmt.Errorf("%s: %w", label, err)
	}
	if q.Overs() > 0 {
		return nil, fmt.Errorf("%s: %d samples of the excerpt exceed full scale though it was lowered; please report this", label, q.Overs())
	}
	return append(file, samples...), nil
}

// fadeSeconds is how long players fade in and out, so that they do not click.
const fadeSeconds = 5e-3

// faded fades interleaved frames in and out, by a raised cosine.
func faded(x []float64, channels, rate int) {
	frames := len(x) / channels
	long := min(int(fadeSeconds*float64(rate)), frames/4)
	for n := range long {
		w := (1 - math.Cos(math.Pi*(float64(n)+0.5)/float64(long))) / 2
		for c := range channels {
			x[n*channels+c] *= w
			x[(frames-1-n)*channels+c] *= w
		}
	}
}

// lowPass keeps what a lower rate can hold. It is of linear phase, so all that is
// brought down is delayed alike, by nothing.
const lowPass = "stages: [{lowpass: {pass: 20 kHz, stop: %g Hz, ripple: 0.01 dB, reject: 100 dB, family: kaiser, phase: linear}}]"

// resampled brings players to their rate, a whole fraction of the recording's.
func resampled(players [][]float64, s span) ([][]float64, error) {
	if s.rate == s.recorded {
		return players, nil
	}
	chain, err := filter.Parse(fmt.Appendf(nil, lowPass, float64(s.rate)/2), "the players' low-pass")
	if err != nil {
		return nil, err
	}
	f, err := chain.Realise(s.recorded, filter.Written)
	if err != nil {
		return nil, err
	}
	channels := len(s.channels)
	format := &goaudio.Format{SampleRate: s.recorded, NumChannels: channels}
	var out [][]float64
	for _, x := range players {
		src, err := f.Apply(audio.FromFrames(format, x))
		if err != nil {
			return nil, err
		}
		low := make([]float64, len(x))
		if err := readAll(src, low); err != nil {
			return nil, err
		}
		out = append(out, thinned(low, channels, s.recorded/s.rate))
	}
	return out, nil
}

// thinned is one in so many of interleaved frames.
func thinned(x []float64, channels, by int) []float64 {
	var out []float64
	for at := 0; at < len(x); at += by * channels {
		out = append(out, x[at:at+channels]...)
	}
	return out
}
