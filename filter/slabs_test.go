package filter

import (
	"fmt"
	"io"
	"slices"
	"testing"

	"fettle/audio"

	goaudio "github.com/go-audio/audio"
)

// slabChains are chains that can be taken apart, and others. Whether a stream of two
// taps is, the planner decides.
var slabChains = map[string]struct {
	text        string
	independent bool
}{
	"linear":            {speech, true},
	"two taps":          {"stages: [fir: {taps: [0.5, 0.25]}]", false},
	"recursive":         {"stages: [highpass: {at: 120 Hz, order: 4}]", false},
	"both":              {"phase: linear\nstages: [lowpass: {pass: 5 kHz, stop: 6.5 kHz, reject: 60 dB, family: kaiser}, highpass: {at: 120 Hz, order: 2, phase: iir}]", false},
	"delayed":           {speech + "  - delay: {by: 3 ms}\n", false},
	"output ahead":      {speech + "align: -20\n", false},
	"one channel alone": {"phase: linear\nstages: [lowpass: {pass: 5 kHz, stop: 6.5 kHz, reject: 60 dB, family: kaiser, channels: [1]}]", false},
}

// TestSlabsInAnyOrder: slabs give what Apply gives bit for bit, filtered last to first
// where they are independent; in slabs that other streams left behind, too.
func TestSlabsInAnyOrder(t *testing.T) {
	const rate = 16000
	for name, c := range slabChains {
		f := realised(t, c.text, rate, Written)
		for _, edges := range []Edges{Silence, Hold, Mirror} {
			for channels := 1; channels <= 3; channels++ {
				for _, frames := range []int{1, 4095, 70_001} {
					what := fmt.Sprintf("%s, %v, %d channels, %d frames", name, edges, channels, frames)
					setup := f.Setup()
					setup.Edges = edges
					src := func() audio.Source {
						return audio.FromFrames(&goaudio.Format{SampleRate: rate, NumChannels: channels}, noise(7, frames*channels))
					}
					out, err := f.ApplyWith(src(), setup)
					if err != nil {
						t.Fatal(err)
					}
					want := drained(t, out, 999)
					s, err := f.Slabs(src(), setup)
					if err != nil {
						t.Fatal(err)
					}
					// With one channel all share a path; a single frame may be summed directly.
					independent := c.independent || name == "one channel alone" && channels == 1
					if frames > 1 && name != "two taps" && s.Independent() != independent {
						t.Fatalf("%s: independent %v, want %v", what, s.Independent(), independent)
					}
					if got := slabbed(t, s); !slices.Equal(got, want) {
						t.Errorf("%s: %d samples differ from Apply's %d, by %g", what, len(got), len(want), worstDifference(got, want))
					}
				}
			}
		}
	}
}

// slabbed reads a stream to its end and filters it backward if it may.
func slabbed(t *testing.T, s *Slabs) (out []float64) {
	t.Helper()
	var all []*Slab
	for {
		b := s.New()
		err := s.Read(b)
		if err == io.EOF {
			break
		}
		if err != nil {
			t.Fatal(err)
		}
		all = append(all, b)
		if !s.Independent() {
			s.Filter(b)
		}
	}
	if s.Independent() {
		for _, b := range slices.Backward(all) {
			s.Filter(b)
		}
	}
	for _, b := range all {
		out = append(out, rest(t, b)...)
		s.Release(b)
	}
	return out
}

func rest(t *testing.T, b *Slab) (out []float64) {
	frames := make([]float64, 1000*b.channels)
	for {
		n, err := b.ReadFrames(frames)
		if err == io.EOF {
			return out
		}
		if err != nil {
			t.Fatal(err)
		}
		out = append(out, frames[:n*b.channels]...)
	}
}

// TestSlabsLeaveNoGarbage: in the middle of a stream nothing is allocated.
func TestSlabsLeaveNoGarbage(t *testing.T) {
	for name, c := range slabChains {
		f := realised(t, c.text, 16000, Written)
		s, err := f.Slabs(audio.FromFrames(&goaudio.Format{SampleRate: 16000, NumChannels: 2}, make([]float64, 2_000_000)), f.Setup())
		if err != nil {
			t.Fatal(err)
		}
		b, frames := s.New(), make([]float64, 2000)
		if n := testing.AllocsPerRun(10, func() {
			if err := s.Read(b); err != nil {
				t.Fatal(err)
			}
			s.Filter(b)
			for _, err := b.ReadFrames(frames); err == nil; _, err = b.ReadFrames(frames) {
			}
		}); n != 0 {
			t.Errorf("%s: %g allocations a slab, want none", name, n)
		}
	}
}
