package filter

import (
	"fmt"
	"math"
	"testing"

	"fettle/filter/response"

	"gonum.org/v1/gonum/dsp/fourier"
)

// A linear chain as it would be used on speech.
const speech = `
phase: linear
stages:
  - highpass: {at: 120 Hz, order: 2}
  - lowpass: {pass: 5 kHz, stop: 6.5 kHz, reject: 60 dB, family: kaiser}
`

// Clicks come out at their own frames: at every rate, for recordings from one
// frame to longer than the kernel.
func TestClicksKeepTheirFrames(t *testing.T) {
	for _, rate := range []int{16000, 44100, 48000, 96000} {
		f := realised(t, speech, rate, Written)
		taps := len(f.paths[0].System.Taps)
		for _, frames := range []int{1, 2, taps / 3, taps - 1, taps, taps + 1, 3*taps + 17} {
			t.Run(fmt.Sprintf("%d Hz, %d frames", rate, frames), func(t *testing.T) {
				x, at := clicks(frames, taps/2)
				y := applied(t, f, 1, x, 1000)
				if len(y) != len(x) {
					t.Fatalf("%d frames came out of %d", len(y), len(x))
				}
				if lag := correlationPeak(x, y); lag != 0 {
					t.Errorf("the output correlates best at lag %d", lag)
				}
				for _, n := range at {
					if !isPeak(y, n, taps/5) {
						t.Errorf("the click at frame %d is not a peak of the output", n)
					}
				}
			})
		}
	}
}

// clicks puts band-limited clicks, of peak 1, every gap frames from frame 0, and
// one at the last frame unless it would stand close to another.
func clicks(frames, gap int) (x []float64, at []int) {
	for n := 0; n < frames; n += gap {
		at = append(at, n)
	}
	if (frames-1)%gap > gap/2 {
		at = append(at, frames-1)
	}
	x = make([]float64, frames)
	for _, n := range at {
		for d := -8; d <= 8; d++ {
			if i := n + d; i >= 0 && i < frames {
				x[i] += bandLimited(d)
			}
		}
	}
	return x, at
}

// bandLimited is a sinc to 0.3 of the rate under a raised cosine.
func bandLimited(d int) float64 {
	if d == 0 {
		return 1
	}
	w := 0.6 * math.Pi * float64(d)
	return math.Sin(w) / w * (1 + math.Cos(math.Pi*float64(d)/9)) / 2
}

func isPeak(y []float64, at, around int) bool {
	for n := max(0, at-around); n < min(len(y), at+around+1); n++ {
		if n != at && y[n] >= y[at] {
			return false
		}
	}
	return true
}

// correlationPeak is the lag of y behind x at which they correlate best.
func correlationPeak(x, y []float64) int {
	size := response.NextPow2(2 * len(x))
	fft := fourier.NewFFT(size)
	pad := func(v []float64) []complex128 {
		return fft.Coefficients(nil, append(append([]float64(nil), v...), make([]float64, size-len(v))...))
	}
	a, b := pad(x), pad(y)
	for k := range a {
		a[k] = b[k] * complex(real(a[k]), -imag(a[k]))
	}
	best, lag := math.Inf(-1), 0
	for n, v := range fft.Sequence(nil, a) {
		if v > best {
			best, lag = v, n
		}
	}
	if lag > size/2 {
		lag -= size
	}
	return lag
}

// Apply equals direct convolution in float64 to 1e-12 (the engine's own bound,
// eps log2 N times the norms, is below 1e-14 here), for kernels short, long,
// even and odd, for recordings shorter and longer, at any call length.
func TestApplyEqualsDirectConvolution(t *testing.T) {
	for _, n := range []int{1, 2, 31, 64, 401, 1500} {
		h := noise(uint64(n), n)
		f := realised(t, firChain(h), 48000, Written)
		skip := f.align.skip(f.paths[0])
		for _, frames := range []int{1, 7, 399, 2003, 9973} {
			x := noise(uint64(frames)+1000, frames)
			want := slowConvolve(h, x, skip)
			for _, step := range []int{1, 613, 1 << 16} {
				if step == 1 && frames > 2003 {
					continue
				}
				if d := worstDifference(applied(t, f, 1, x, step), want); !(d <= 1e-12) {
					t.Errorf("%d taps, %d frames, calls of %d: %g from direct convolution, allowed 1e-12", n, frames, step, d)
				}
			}
		}
	}
}

func firChain(h []float64) string {
	text := "stages:\n  - fir: {taps: ["
	for i, v := range h {
		if i > 0 {
			text += ", "
		}
		text += fmt.Sprint(v)
	}
	return text + "]}\n"
}

// A recursive chain equals its difference equation, computed section by section.
func TestApplyEqualsDirectRecursion(t *testing.T) {
	f := realised(t, "phase: iir\nstages:\n  - highpass: {at: 80 Hz, order: 5}\n  - bell: {at: 2 kHz, gain: 4 dB, q: 1}\n", 44100, Written)
	x := noise(3, 20011)
	want := x
	for _, s := range f.paths[0].System.Sections {
		want = recursed(s, want)
	}
	skip := f.align.skip(f.paths[0])
	if skip != 0 {
		t.Fatalf("bulk latency rounds to %d samples; the test takes it as 0", skip)
	}
	if d := worstDifference(applied(t, f, 1, x, 997), want); !(d <= 1e-12) {
		t.Errorf("%g from direct recursion, allowed 1e-12", d)
	}
}

// recursed is y[n] = b0 x[n] + b1 x[n-1] + b2 x[n-2] - a1 y[n-1] - a2 y[n-2].
func recursed(s response.Section, x []float64) []float64 {
	y := make([]float64, len(x))
	at := func(v []float64, n int) float64 {
		if n < 0 {
			return 0
		}
		return v[n]
	}
	for n := range x {
		y[n] = s.B0*x[n] + s.B1*at(x, n-1) + s.B2*at(x, n-2) - s.A1*at(y, n-1) - s.A2*at(y, n-2)
	}
	return y
}

// Any split of the calls gives the same bits, with several channels, edges
// and a stage on one channel only.
func TestApplySplitsBitIdentical(t *testing.T) {
	const chain = `
phase: linear
edges: mirror
stages:
  - highpass: {at: 500 Hz, order: 2}
  - lowpass: {at: 6 kHz, order: 3, phase: iir, channels: [2]}
`
	f := realised(t, chain, 16000, Written)
	x := noise(9, 3*20000)
	want := applied(t, f, 3, x, 1<<16)
	for _, step := range []int{1, 7, 4095, 4096, 4097, 12345} {
		got := applied(t, f, 3, x, step)
		if len(got) != len(want) {
			t.Fatalf("calls of %d: %d samples, want %d", step, len(got), len(want))
		}
		for i := range got {
			if got[i] != want[i] {
				t.Fatalf("calls of %d: sample %d is %v, in one call it is %v", step, i, got[i], want[i])
			}
		}
	}
}

// A chain that does nothing gives back the very bits, signed zeros included.
func TestIdentityIsExact(t *testing.T) {
	x := append(noise(5, 5000), math.Copysign(0, -1), 5e-324, math.MaxFloat64, -1)
	for _, text := range []string{"stages: []", "stages: [{gain: {by: 0 dB}}]", "stages: [{delay: {by: 0 samples}}]", "stages: [{fir: {taps: [1]}}]"} {
		f := realised(t, text, 8000, Written)
		if !f.Untouched(1) {
			t.Errorf("%s: counts as touching samples", text)
		}
		for i, v := range applied(t, f, 1, x, 333) {
			if math.Float64bits(v) != math.Float64bits(x[i]) {
				t.Fatalf("%s: sample %d is %v, was %v", text, i, v, x[i])
			}
		}
	}
}

func TestEmptyRecording(t *testing.T) {
	for _, edges := range []Edges{Silence, Hold, Mirror} {
		f := realised(t, speech+"edges: "+string(edges), 16000, Written)
		if y := applied(t, f, 2, nil, 10); len(y) != 0 {
			t.Errorf("%s: %d samples came out of an empty recording", edges, len(y))
		}
	}
}
