package audio

import (
	"io"
	"testing"

	goaudio "github.com/go-audio/audio"
)

func TestFromFrames(t *testing.T) {
	format := &goaudio.Format{SampleRate: 8000, NumChannels: 2}
	x := ramp(2 * 11)
	for _, step := range []int{1, 4, 10, 11, 12} {
		s := FromFrames(format, x)
		if s.Frames() != 11 || s.Format() != format {
			t.Fatalf("%d frames, %+v", s.Frames(), s.Format())
		}
		mustEqual(t, readAll(t, s, step), x)
		for range 2 {
			if n, err := s.ReadFrames(make([]float64, 2)); n != 0 || err != io.EOF {
				t.Errorf("behind the end: %d frames, %v", n, err)
			}
		}
	}
	if n, err := FromFrames(format, nil).ReadFrames(make([]float64, 2)); n != 0 || err != io.EOF {
		t.Errorf("of nothing: %d frames, %v", n, err)
	}
}

// TestPanicsOnPartialFrames: for every way frames go in or out.
func TestPanicsOnPartialFrames(t *testing.T) {
	stereo := &goaudio.Format{SampleRate: 8000, NumChannels: 2}
	path := t.TempDir() + "/a.wav"
	w, err := Create(path, pcm16(2, 1))
	if err != nil {
		t.Fatal(err)
	}
	defer w.Abort()
	for name, f := range map[string]func(){
		"FromFrames":           func() { FromFrames(stereo, make([]float64, 3)) },
		"FromFrames, channels": func() { FromFrames(&goaudio.Format{}, nil) },
		"ReadFrames, odd":      func() { FromFrames(stereo, make([]float64, 4)).ReadFrames(make([]float64, 3)) },
		"ReadFrames, nothing":  func() { FromFrames(stereo, make([]float64, 4)).ReadFrames(nil) },
		"Recording, odd":       func() { mustOpen(t, "testdata/scipy_44100Hz_2ch_pcm16.wav").ReadFrames(make([]float64, 3)) },
		"WriteFrames":          func() { w.WriteFrames(make([]float64, 3)) },
		"NewMeter":             func() { NewMeter(0) },
		"Meter.Add":            func() { NewMeter(2).Add(make([]float64, 3)) },
	} {
		func() {
			defer func() {
				if recover() == nil {
					t.Errorf("%s: no panic", name)
				}
			}()
			f()
		}()
	}
}
