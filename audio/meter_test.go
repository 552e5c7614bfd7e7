package audio

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"fettle/audio/internal/vector/vectortest"

	"pgregory.net/rapid"
)

func metered(x []float64, channels int) *Meter {
	m := NewMeter(channels)
	m.Add(x)
	return m
}

// slowTruePeak is the direct twin: zeros put between the samples, one long
// low-pass over it all, at every one of the points.
func slowTruePeak(x []float64) float64 {
	const n, reach = TruePeakOversampling, interpolatorTaps / 2
	peak := 0.
	for at := -reach * n; at <= (len(x)+reach)*n; at++ {
		phase := (at%n + n) % n
		first := (at - phase) / n
		sum, total := 0., 0.
		for k := first - reach + 1; k <= first+reach; k++ {
			t := float64(at)/n - float64(k)
			c := sinc(t) * kaiser(t/reach, interpolatorBeta)
			if phase == 0 && k != first {
				c = 0 // sinc of a whole number
			}
			total += c
			if k >= 0 && k < len(x) {
				sum += c * x[k]
			}
		}
		peak = max(peak, math.Abs(sum/total))
	}
	return peak
}

// everyWindow runs the interpolator at every frame, and passes nothing over.
func everyWindow(x []float64) float64 {
	silence := make([]float64, interpolatorTaps)
	padded := slices.Concat(silence, x, silence)
	peak := largest(x)
	for i := range len(padded) - interpolatorTaps + 1 {
		peak = max(peak, interpolator.peak((*window)(padded[i:])))
	}
	return peak
}

// TestTruePeakTwin: 24 products of samples up to 1 and taps whose magnitudes
// sum to 2.4 round to within 24*2.4*2^-53 = 6e-15.
func TestTruePeakTwin(t *testing.T) {
	const tolerance = 1e-14
	rapid.Check(t, func(t *rapid.T) {
		x := rapid.SliceOfN(rapid.Float64Range(-1, 1), 0, 120).Draw(t, "x")
		if rapid.Bool().Draw(t, "hard") {
			x = drawHard(t, rapid.SampledFrom([]int{5, 40, 120}).Draw(t, "frames"))
		}
		if rapid.Bool().Draw(t, "quiet in parts") {
			for i := range x {
				x[i] *= math.Pow(0.5, float64(i/16))
			}
		}
		channels := rapid.SampledFrom([]int{1, 2, 3, 8, meterBlock / chunkFrames}).Draw(t, "channels") // the last: blocks of one chunk
		spread := make([]float64, len(x)*channels)
		for i, v := range x {
			spread[(i+1)*channels-1] = v
		}
		got, want := metered(spread, channels).TruePeak(), slowTruePeak(x)
		if !(math.Abs(got-want) <= tolerance) {
			t.Fatalf("true peak %.17g, twin %.17g, allowed %g", got, want, tolerance)
		}
	})
}

// TestSparingChangesNothing: the same bits as without passing anything over, in
// several blocks, for channels of different signals, in any split.
func TestSparingChangesNothing(t *testing.T) { vectortest.Each(t, sparingChangesNothing) }

func sparingChangesNothing(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		channels := rapid.SampledFrom([]int{1, 2, 3, 8}).Draw(t, "channels")
		frames := rapid.SampledFrom([]int{1, 20, 333, meterBlock / channels, 3*meterBlock/channels + 5}).Draw(t, "frames")
		each := make([][]float64, channels)
		sample, truePeak := 0., 0.
		for c := range each {
			each[c] = drawHard(t, frames)
			sample = max(sample, slices.Max(each[c]), -slices.Min(each[c]))
			truePeak = max(truePeak, everyWindow(each[c]))
		}
		m := NewMeter(channels)
		for x := interleave(each); len(x) > 0; {
			n := min(len(x), channels*rapid.IntRange(1, 2000).Draw(t, "call"))
			m.Add(x[:n])
			x = x[n:]
		}
		if m.TruePeak() != truePeak || m.SamplePeak() != sample {
			t.Fatalf("true peak %.17g, sample peak %.17g; of every window %.17g, %.17g", m.TruePeak(), m.SamplePeak(), truePeak, sample)
		}
	})
}

// TestMeterSplit: the same bits for any split, any order of asking, several
// channels, and more than one block.
func TestMeterSplit(t *testing.T) { vectortest.Each(t, meterSplit) }

func meterSplit(t *testing.T) {
	const channels = 3
	r := rand.New(rand.NewPCG(8, 9))
	x := make([]float64, channels*3001)
	for i := range x {
		x[i] = r.NormFloat64() * math.Exp(-math.Abs(float64(i-4000))/800)
	}
	want := metered(x, channels)
	for _, step := range []int{1, 2, 7, 24, 1344, 1345, 3000} { // 1344 is a block
		m := NewMeter(channels)
		for at := 0; at < len(x); at += step * channels {
			m.Add(x[at:min(len(x), at+step*channels)])
			if at%101 == 0 && !(m.TruePeak() >= m.SamplePeak()) {
				t.Fatalf("true peak %g below sample peak %g", m.TruePeak(), m.SamplePeak())
			}
		}
		if m.TruePeak() != want.TruePeak() || m.SamplePeak() != want.SamplePeak() {
			t.Errorf("in steps of %d: %v, %v; want %v, %v", step, m.TruePeak(), m.SamplePeak(), want.TruePeak(), want.SamplePeak())
		}
	}
}

// TestChannelsDoNotMix: several channels give the largest of each alone.
func TestChannelsDoNotMix(t *testing.T) { vectortest.Each(t, channelsDoNotMix) }

func channelsDoNotMix(t *testing.T) {
	a, b := sine(500, 0.11, 0.5), sine(500, 0.37, 0.6)
	both, alone := metered(interleave([][]float64{a, b}), 2), max(metered(a, 1).TruePeak(), metered(b, 1).TruePeak())
	if both.TruePeak() != alone {
		t.Errorf("true peak %v, of the channels alone %v", both.TruePeak(), alone)
	}
}

// quarterTone is a tone of a quarter of the rate, its samples at 45° and so 3.01
// dB under its peak of 1: the case for which ITU-R BS.1770, Annex 2 wants a true
// peak. It is faded in and out so that nothing but the tone is measured.
func quarterTone(n int) []float64 {
	x := make([]float64, n)
	for i := range x {
		fade := min(1, float64(i)/200, float64(n-1-i)/200)
		x[i] = fade * math.Sin(math.Pi/2*float64(i)+math.Pi/4)
	}
	return x
}

func TestQuarterRateTone(t *testing.T) {
	m := metered(quarterTone(3000), 1)
	if sample := DB(m.SamplePeak()); !(math.Abs(sample+3.01) <= 0.01) {
		t.Errorf("sample peak %.3f dBFS, want -3.01", sample)
	}
	if peak := DB(m.TruePeak()); !(math.Abs(peak) <= 0.1) {
		t.Errorf("true peak %.4f dBTP, want 0 within 0.1", peak)
	} else {
		t.Logf("true peak %.4f dBTP, allowed 0.1", peak)
	}
}

// TestUnderRead: tones of many phases stay within the bound of Annex 2 plus the
// interpolator's own 0.01 dB, and never over-read by more than that.
func TestUnderRead(t *testing.T) {
	const own = 0.01
	worst := 0.
	for _, f := range []float64{0.01, 0.125, 0.2, 0.25, 1. / 3, 0.375, 0.4} {
		bound := -20*math.Log10(math.Cos(math.Pi*f/TruePeakOversampling)) + own
		for phase := 0.; phase < math.Pi; phase += math.Pi / 64 {
			x := make([]float64, 2400)
			for i := range x {
				fade := 0.5 - 0.5*math.Cos(2*math.Pi*min(0.5, float64(i)/800, float64(len(x)-1-i)/800))
				x[i] = fade * math.Cos(2*math.Pi*f*(float64(i)-1200)+phase)
			}
			read := DB(metered(x, 1).TruePeak())
			if !(read >= -bound && read <= own) {
				t.Errorf("tone at %g of the rate, phase %.2f: %.4f dB, allowed %.4f to %.4f", f, phase, read, -bound, own)
			}
			worst = max(worst, -(read + bound - own))
		}
	}
	t.Logf("the interpolator's own part is at the most %.4f dB, allowed %g", worst, own)
}

// TestFlatness reads the interpolator's gain where the doc comment states it.
func TestFlatness(t *testing.T) {
	const allowed = 0.01
	worst := 0.
	for _, t0 := range []float64{1. / 4, 2. / 4} { // phase 3 mirrors phase 1
		h := designPhase(t0)
		for f := 0.; f <= 0.4; f += 0.001 {
			var re, im float64
			for k, c := range h {
				re += c * math.Cos(2*math.Pi*f*float64(k))
				im += c * math.Sin(2*math.Pi*f*float64(k))
			}
			worst = max(worst, math.Abs(DB(math.Hypot(re, im))))
		}
	}
	if !(worst <= allowed) {
		t.Errorf("off by %.5f dB up to 0.4 of the rate, allowed %g", worst, allowed)
	}
	t.Logf("off by %.5f dB, allowed %g", worst, allowed)
}

// TestNorm: no input of magnitude 1 gives more than the norm, and one comes near.
func TestNorm(t *testing.T) {
	worst := 0.
	for _, t0 := range []float64{1. / 4, 2. / 4} {
		h := designPhase(t0)
		x := h
		for k := range x {
			x[k] = math.Copysign(1, h[k])
		}
		worst = max(worst, interpolator.peak(&x))
	}
	if !(worst <= interpolator.norm && worst >= interpolator.norm*(1-1e-11)) {
		t.Errorf("largest output %.15g, norm %.15g", worst, interpolator.norm)
	}
}

// TestNothingIsPassedOver: after a click of 1, samples of less than half of
// that still count if their signs make the most of them.
func TestNothingIsPassedOver(t *testing.T) { vectortest.Each(t, nothingIsPassedOver) }

func nothingIsPassedOver(t *testing.T) {
	const want = 1.001
	h := designPhase(2. / 4)
	x := append([]float64{1}, make([]float64, 50)...)
	for _, c := range h {
		x = append(x, math.Copysign(want/magnitudes(h[:]), c))
	}
	// As many roundings as in TestTruePeakTwin.
	if got := metered(x, 1).TruePeak(); !(math.Abs(got-want) <= 1e-14) {
		t.Errorf("true peak %.17g, want %g", got, want)
	}
}

// TestEveryPlaceCounts: two equal samples swing over between them wherever they
// are, at the ends of chunks and of blocks too.
func TestEveryPlaceCounts(t *testing.T) { vectortest.Each(t, everyPlaceCounts) }

func everyPlaceCounts(t *testing.T) {
	want := everyWindow([]float64{1, 1})
	for _, channels := range []int{1, 3, meterBlock / chunkFrames} {
		const reach = 2*chunkFrames + 10
		block := NewMeter(channels).size
		for at := range 2*block + reach {
			if at%block > reach && at%block < block-reach {
				continue
			}
			m := metered(make([]float64, at*channels), channels)
			for _, v := range []float64{1, 1, 0, 0, 0, 0, 0} {
				frame := make([]float64, channels)
				frame[0] = v
				m.Add(frame)
			}
			m.Add(make([]float64, 2*block*channels)) // the end is not what is looked at
			if m.TruePeak() != want {
				t.Fatalf("%d channels, at frame %d: true peak %v, want %v", channels, at, m.TruePeak(), want)
			}
		}
	}
}

// TestTailCounts: the waveform swings over behind the last sample.
func TestTailCounts(t *testing.T) { vectortest.Each(t, tailCounts) }

func tailCounts(t *testing.T) {
	x := []float64{0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 1, 1}
	m := metered(x, 1)
	if !(m.TruePeak() > 1.2 && m.TruePeak() < 1.3) { // 4/π for an ideal interpolator
		t.Errorf("true peak %g of two equal samples, want about 4/π = 1.273", m.TruePeak())
	}
	before := m.TruePeak()
	m.Add(make([]float64, 100))
	if m.TruePeak() != before {
		t.Errorf("true peak %g after silence, was %g", m.TruePeak(), before)
	}
	if peak := NewMeter(2).TruePeak(); peak != 0 || !math.IsInf(DB(peak), -1) {
		t.Errorf("of nothing: %g", peak)
	}
}

func TestDB(t *testing.T) {
	for x, want := range map[float64]float64{1: 0, 10: 20, 0.1: -20, 2: 6.020599913279624} {
		if got := DB(x); !(math.Abs(got-want) <= 1e-14) {
			t.Errorf("DB(%g) = %v, want %v", x, got, want)
		}
	}
}
