package main

import (
	"math"
	"path/filepath"
	"testing"

	"fettle/audio"
)

// TestSamples does the main job on the sample recordings and listens with
// numbers: mains hum gone from the background, the offset gone, every sharp
// onset where it was. Frames are those of samples/README.md.
func TestSamples(t *testing.T) {
	b := newBench(t)
	in := filepath.Join("..", "..", "samples", "recordings")
	b.Out = b.path("clean")
	fettle("render", "--chain", sampleChain("interviews"), "--out", b.Out, filepath.Join(in, "interviews")).must(t, exitDone)
	for _, c := range []struct {
		file       string
		background int // from this frame to the end
		onsets     []int
	}{
		{"deckhand_side_a.wav", 96400, []int{8017, 19213, 47591, 72211}},
		{"engine tender.wav", 99600, []int{7001, 17011, 43003, 75011}},
	} {
		before := wholeOf(t, filepath.Join(in, "interviews", c.file))
		after := wholeOf(t, filepath.Join(b.Out, c.file))
		mustEqual(t, c.file+": frames", len(after), len(before))
		hum := level(before[c.background:], 50) - level(after[c.background:], 50)
		// 40 dB by the hum stage and 6 by the high-pass; 20 dB of it must show
		// over hiss and what the notch lets through of the rumble beside it.
		if !(hum >= 20) {
			t.Errorf("%s: 50 Hz fell by %.1f dB", c.file, hum)
		}
		if m := mean(after[8000:]); !(math.Abs(m) <= 1e-4) {
			t.Errorf("%s: an offset of %g is left", c.file, m)
		}
		for _, at := range c.onsets {
			// The chain leaves -0.44 samples, so the nearest whole lag may be 0 or -1.
			if lag := bestLag(before, after, at-40, at+400); lag > 0 || lag < -1 {
				t.Errorf("%s: the onset at frame %d moved by %d frames", c.file, at, lag)
			}
		}
	}
}

// TestSamplesLinear: linear phase leaves no residue, so every lag is 0, on
// both channels, which stand 38 frames apart.
func TestSamplesLinear(t *testing.T) {
	b := newBench(t)
	in := filepath.Join("..", "..", "samples", "recordings", "deck", "slate_and_gangway.wav")
	fettle("render", "--chain", sampleChain("deck"), "--out", b.Out, in).must(t, exitDone)
	before, after := wholeOf(t, in), wholeOf(t, filepath.Join(b.Out, "slate_and_gangway.wav"))
	for c, late := range []int{0, 38} {
		for _, at := range []int{24001, 60013, 71011, 103007} {
			if lag := bestLag(everyOther(before, c), everyOther(after, c), at+late-100, at+late+1500); lag != 0 {
				t.Errorf("channel %d: the onset at frame %d moved by %d frames", c+1, at+late, lag)
			}
		}
	}
}

func wholeOf(t *testing.T, path string) []float64 {
	t.Helper()
	r, err := audio.Open(path)
	mustDo(t, err)
	defer r.Close()
	x := make([]float64, r.Frames()*int64(r.Format().NumChannels))
	for n := 0; n < len(x); {
		frames, err := r.ReadFrames(x[n:])
		mustDo(t, err)
		n += frames * r.Format().NumChannels
	}
	return x
}

func everyOther(x []float64, from int) []float64 {
	var out []float64
	for i := from; i < len(x); i += 2 {
		out = append(out, x[i])
	}
	return out
}

// level of a tone at 16 kHz, in dB, by Goertzel's sum.
func level(x []float64, hz float64) float64 {
	var re, im float64
	for n, v := range x {
		sin, cos := math.Sincos(2 * math.Pi * hz * float64(n) / 16000)
		re, im = re+v*cos, im+v*sin
	}
	return 20 * math.Log10(math.Hypot(re, im)/float64(len(x)))
}

func mean(x []float64) (m float64) {
	for _, v := range x {
		m += v / float64(len(x))
	}
	return m
}

// bestLag is the lag, within 20 frames, at which the stretch of b correlates
// best with that of a, both differentiated so that onsets count and not bass.
func bestLag(a, b []float64, from, to int) int {
	best, at := math.Inf(-1), 0
	for lag := -20; lag <= 20; lag++ {
		sum := 0.0
		for n := from; n < to; n++ {
			sum += (a[n] - a[n-1]) * (b[n+lag] - b[n+lag-1])
		}
		if sum > best {
			best, at = sum, lag
		}
	}
	return at
}
