package filter

import (
	"errors"
	"strings"
	"testing"

	"fettle/audio"

	goaudio "github.com/go-audio/audio"
)

// A chain that is sound but can't serve a rate says so of that recording, at
// the stage's place, with the frequency, half the rate, and what to do.
func TestErrorsForARate(t *testing.T) {
	for _, c := range []struct {
		stage string
		rate  int
		words []string
	}{
		{"lowpass: {at: 8 kHz, order: 4}", 16000, []string{"8000 Hz", "16000 Hz", "when: rate > 16000 Hz"}}, // at half the rate exactly
		{"lowpass: {at: 8.1 kHz, order: 4}", 16000, []string{"8100 Hz", "8000 Hz", "when: rate > 16200 Hz"}},
		{"bandpass: {at: [300 Hz, 9 kHz], order: 2}", 16000, []string{"9000 Hz", "8000 Hz"}},
		{"lowpass: {pass: 7 kHz, stop: 8 kHz, reject: 60 dB, family: kaiser}", 16000, []string{"8000 Hz", "when: rate > 16000 Hz"}},
		{"lowpass: {at: 7.5 kHz, width: 1 kHz, reject: 60 dB, family: kaiser}", 16000, []string{"8000 Hz"}},
		{"bell: {at: 9 kHz, gain: 3 dB, q: 1}", 16000, []string{"9000 Hz", "8000 Hz"}},
		{"bell: {at: 9 kHz, gain: 3 dB, width: 1 oct}", 16000, []string{"9000 Hz", "8000 Hz"}},
		{"highshelf: {at: 9 kHz, gain: 3 dB}", 16000, []string{"9000 Hz", "8000 Hz"}},
		{"notch: {at: 9 kHz, q: 20}", 16000, []string{"9000 Hz", "8000 Hz"}},
		{"notch: {at: 1 kHz, width: 9 kHz}", 16000, []string{"9000 Hz", "8000 Hz"}},
		{"allpass: {at: 9 kHz}", 16000, []string{"9000 Hz", "8000 Hz"}},
		{"dc: {at: 9 kHz}", 16000, []string{"9000 Hz", "8000 Hz"}},
		{"dc: {at: 1e-9 Hz}", 96000, []string{"ring for more than 4194304 samples", "raise"}},
		{"highpass: {at: 1e-9 Hz, order: 2}", 96000, []string{"ring for more than"}},
	} {
		chain := parsed(t, "stages:\n  - gain: {by: 1 dB}\n  - "+c.stage+"\n")
		for _, as := range []Realisation{Written, Linear, Minimum, IIR} {
			_, err := chain.Realise(c.rate, as)
			kind, _, _ := strings.Cut(c.stage, ":")
			checkRecordingError(t, err, append(c.words, "chain.yaml:3:5: stage 2, "+kind+": ")...)
		}
	}
}

func checkRecordingError(t *testing.T, err error, words ...string) {
	t.Helper()
	if !errors.Is(err, ErrForRecording) {
		t.Errorf("%v does not wrap ErrForRecording", err)
		return
	}
	for _, w := range words {
		if !strings.Contains(err.Error(), w) {
			t.Errorf("%v lacks the words %s", err, w)
		}
	}
}

// A stage whose condition does not hold is no error; just below half the rate
// is none either.
func TestRatesThatSuit(t *testing.T) {
	realised(t, in("lowpass: {at: 9 kHz, order: 4, when: rate > 18 kHz}"), 16000, Written)
	realised(t, in("lowpass: {at: 7.99 kHz, order: 1}"), 16000, Written)
}

// A rate that is none is the caller's mistake, not a recording's.
func TestNoRate(t *testing.T) {
	for _, rate := range []int{0, -48000} {
		if _, err := parsed(t, "stages: []").Realise(rate, Written); err == nil || errors.Is(err, ErrForRecording) {
			t.Errorf("a rate of %d Hz gave %v", rate, err)
		}
	}
}

func TestRecordingsThatDoNotSuit(t *testing.T) {
	f := realised(t, in("gain: {by: 1 dB, channels: [1, 3]}"), 48000, Written)
	_, err := f.Apply(silent(48000, 2))
	checkRecordingError(t, err, "chain.yaml:2:5: stage 1, gain: ", "channel 3", "has 2")
	_, err = f.Apply(silent(44100, 3))
	checkRecordingError(t, err, "48000 Hz", "44100 Hz")
}

func silent(rate, channels int) audio.Source {
	return audio.FromFrames(&goaudio.Format{SampleRate: rate, NumChannels: channels}, nil)
}

func TestLoadErrors(t *testing.T) {
	for path, words := range map[string]string{
		t.TempDir() + "/absent.yaml": "no such file",
		t.TempDir():                  "directory",
	} {
		if _, err := Load(path); err == nil || !strings.Contains(err.Error(), words) || !strings.Contains(err.Error(), path) {
			t.Errorf("%s gave %v", path, err)
		}
	}
}

func TestParseRealisation(t *testing.T) {
	for _, want := range []Realisation{Linear, Minimum, IIR, Zero, Given} {
		if got, err := ParseRealisation(string(want)); got != want || err != nil {
			t.Errorf("%s is %q, %v", want, got, err)
		}
	}
	for _, name := range []string{"", "mixed", "Linear"} {
		if _, err := ParseRealisation(name); err == nil || !strings.Contains(err.Error(), "linear, minimum, iir, zero, given") {
			t.Errorf("%q gave %v", name, err)
		}
	}
}
