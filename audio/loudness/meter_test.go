package loudness

import (
	"fmt"
	"math"
	"math/cmplx"
	"math/rand/v2"
	"strings"
	"testing"
)

// TestTabled: at 48 kHz the coefficients are those of BS.1770-4, Annex 1, tables 1
// and 2, which have 14 digits. The figures are from memory.
func TestTabled(t *testing.T) {
	for name, c := range map[string]struct {
		of   prototype
		want [5]float64 // b0 b1 b2 a1 a2
	}{
		"shelf":     {shelf, [5]float64{1.53512485958697, -2.69169618940638, 1.19839281085285, -1.69065929318241, 0.73248077421585}},
		"high-pass": {highpass, [5]float64{1, -2, 1, -1.99004745483398, 0.99007225036621}},
	} {
		s := c.of.at(48000)
		for i, got := range [5]float64{s.b0, s.b1, s.b2, s.a1, s.a2} {
			if !(math.Abs(got-c.want[i]) <= 1e-14) {
				t.Errorf("%s, coefficient %d: %.15g, the standard has %.15g", name, i, got, c.want[i])
			}
		}
	}
}

// at is the K weighting's gain in dB.
func (w weighting) at(hz, rate float64) float64 {
	z := cmplx.Rect(1, -2*math.Pi*hz/rate) // z^-1
	db := 0.0
	for _, s := range []section{w.shelf, w.highpass} {
		h := (complex(s.b0, 0) + complex(s.b1, 0)*z + complex(s.b2, 0)*z*z) / (1 + complex(s.a1, 0)*z + complex(s.a2, 0)*z*z)
		db += 20 * math.Log10(cmplx.Abs(h))
	}
	return db
}

// TestEveryRate weighs alike, as near as the bilinear transform lets the shelf's slope
// be: within 0.0102 dB from 32 kHz on and 0.282 dB at 8 kHz, as measured.
func TestEveryRate(t *testing.T) {
	at48 := newWeighting(48000)
	for _, rate := range []float64{8000, 11025, 16000, 22050, 32000, 44100, 88200, 96000, 192000} {
		w := newWeighting(rate)
		for _, hz := range []float64{10, 20, 38, 100, 400, 997, 1682, 2500} {
			allowed := 0.011
			if rate < 32000 {
				allowed = 0.29
			}
			if got, want := w.at(hz, rate), at48.at(hz, 48000); !(math.Abs(got-want) <= allowed) {
				t.Errorf("%g Hz: %g Hz is weighed by %.3f dB, at 48 kHz by %.3f", rate, hz, got, want)
			}
		}
	}
}

// tone appends seconds of a sine of a peak level in dBFS, alike in all channels.
func tone(x []float64, rate, channels int, seconds, hz, dbfs float64) []float64 {
	peak := math.Pow(10, dbfs/20)
	for n := range int(math.Round(seconds * float64(rate))) {
		v := peak * math.Sin(2*math.Pi*hz*float64(n)/float64(rate))
		for range channels {
			x = append(x, v)
		}
	}
	return x
}

func measured(t testing.TB, rate, channels int, frames []float64) *Meter {
	t.Helper()
	m, err := NewMeter(rate, channels)
	if err != nil {
		t.Fatal(err)
	}
	m.Add(frames)
	return m
}

// TestSine: 997 Hz at 0 dBFS in one channel reads -3.01 LKFS (BS.1770-4, Annex 1),
// and in two channels 3.01 more. 0.01 is what the figure is rounded to; at low rates
// the bilinear transform bends the shelf towards 997 Hz, by what the package's
// comment states.
func TestSine(t *testing.T) {
	bent := map[int]float64{8000: 0.2, 11025: 0.1, 16000: 0.05, 22050: 0.02}
	for _, rate := range []int{8000, 11025, 16000, 22050, 32000, 44100, 48000, 88200, 96000, 192000} {
		for channels, want := range map[int]float64{1: -3.01, 2: 0} {
			m := measured(t, rate, channels, tone(nil, rate, channels, 3, 997, 0))
			for what, got := range map[string]float64{"loudness": m.Loudness(), "ungated": m.Ungated()} {
				if !(math.Abs(got-want) <= 0.01+bent[rate]) {
					t.Errorf("%d Hz, %d channels: %s %.4f LKFS, wanted %.2f", rate, channels, what, got, want)
				}
			}
		}
	}
}

// TestGates: stereo tones of 1 kHz read what EBU Tech 3341 (2016), table 1, says of
// its cases 1 to 5, within the 0.1 that it allows. Levels, lengths and readings are
// from memory.
func TestGates(t *testing.T) {
	type part struct{ seconds, dbfs float64 }
	for _, c := range []struct {
		parts []part
		want  float64
	}{
		{[]part{{20, -23}}, -23},
		{[]part{{20, -33}}, -33},
		{[]part{{10, -36}, {60, -23}, {10, -36}}, -23},
		{[]part{{10, -72}, {10, -36}, {60, -23}, {10, -36}, {10, -72}}, -23},
		{[]part{{20, -26}, {20.1, -20}, {20, -26}}, -23},
	} {
		var x []float64
		for _, p := range c.parts {
			x = tone(x, 16000, 2, p.seconds, 1000, p.dbfs)
		}
		if got := measured(t, 16000, 2, x).Loudness(); !(math.Abs(got-c.want) <= 0.1) {
			t.Errorf("%v: %.3f LKFS, wanted %g", c.parts, got, c.want)
		}
	}
}

// TestNotStated: what is shorter than a block or under the gate has no loudness; its
// energy is still there.
func TestNotStated(t *testing.T) {
	for what, c := range map[string]struct{ seconds, dbfs, ungated float64 }{
		"short": {0.399, -20, -23.01},
		"faint": {2, -80, -83.01},
	} {
		m := measured(t, 48000, 1, tone(nil, 48000, 1, c.seconds, 997, c.dbfs))
		if got := m.Loudness(); !math.IsNaN(got) {
			t.Errorf("%s: %g LKFS are stated", what, got)
		}
		if got := m.Ungated(); !(math.Abs(got-c.ungated) <= 0.02) {
			t.Errorf("%s: ungated %.3f, wanted %.2f", what, got, c.ungated)
		}
	}
	for what, m := range map[string]*Meter{"nothing": measured(t, 48000, 1, nil), "silence": measured(t, 48000, 1, make([]float64, 48000))} {
		if !math.IsNaN(m.Loudness()) || !math.IsInf(m.Ungated(), -1) {
			t.Errorf("%s: %g LKFS, ungated %g", what, m.Loudness(), m.Ungated())
		}
	}
	if got := measured(t, 48000, 1, tone(nil, 48000, 1, 0.4, 997, -20)).Loudness(); math.IsNaN(got) {
		t.Error("one whole block is not stated")
	}
}

// TestOver: bursts over a hum that is then taken away are no louder, though their own
// loudness, from which the pauses are then gated, is.
func TestOver(t *testing.T) {
	const rate = 16000
	var bursts []float64
	for range 4 {
		bursts = tone(bursts, rate, 1, 0.5, 997, -20)
		bursts = append(bursts, make([]float64, rate)...)
	}
	hum := tone(nil, rate, 1, float64(len(bursts))/rate, 160, -26)
	for i, v := range bursts {
		hum[i] += v
	}
	with, without := measured(t, rate, 1, hum), measured(t, rate, 1, bursts)
	if by := without.Loudness() - with.Loudness(); !(by > 0.5) {
		t.Errorf("the bursts alone are louder by %.2f dB only: the test tests nothing", by)
	}
	if by := without.Over(with); !(by <= 0 && by >= -1.5) {
		t.Errorf("the bursts are %.2f dB louder than with the hum", by)
	}
	quiet := make([]float64, len(bursts))
	for i, v := range bursts {
		quiet[i] = v / 2
	}
	if by := without.Over(measured(t, rate, 1, quiet)); !(math.Abs(by-20*math.Log10(2)) <= 1e-9) {
		t.Errorf("twice as high is %.4f dB louder", by)
	}
	for what, other := range map[string]*Meter{"silence": measured(t, rate, 1, make([]float64, len(bursts))), "shorter": measured(t, rate, 1, bursts[:rate])} {
		if by := without.Over(other); !math.IsNaN(by) {
			t.Errorf("%s: %g dB are stated", what, by)
		}
	}
}

// TestSplits: any split of a stream into calls reads the same, at a rate whose tenth
// is no whole number too.
func TestSplits(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 2))
	for _, rate := range []int{11025, 48000} {
		x := make([]float64, 2*rate*2)
		for i := range x {
			x[i] = rng.Float64() - 0.5
		}
		whole := measured(t, rate, 2, x)
		for _, step := range []int{1, 7, 4800} {
			m := measured(t, rate, 2, nil)
			for rest := x; len(rest) > 0; {
				n := min(2*step, len(rest))
				m.Add(rest[:n])
				rest = rest[n:]
			}
			if m.Loudness() != whole.Loudness() || m.Ungated() != whole.Ungated() {
				t.Errorf("%d Hz in steps of %d: %g, at once %g", rate, step, m.Loudness(), whole.Loudness())
			}
		}
	}
}

func TestRefuses(t *testing.T) {
	if _, err := NewMeter(3999, 1); err == nil || !strings.Contains(err.Error(), "at least 4000 Hz") {
		t.Errorf("3999 Hz: %v", err)
	}
	for what, call := range map[string]func(){
		"no channels": func() { NewMeter(48000, 0) },
		"half frames": func() { measured(t, 48000, 2, make([]float64, 3)) },
	} {
		if fmt.Sprint(panics(call)) == "<nil>" {
			t.Errorf("%s: no panic", what)
		}
	}
}

func panics(call func()) (with any) {
	defer func() { with = recover() }()
	call()
	return nil
}

func BenchmarkAdd(b *testing.B) {
	x := tone(nil, 48000, 2, 1, 997, -20)
	m := measured(b, 48000, 2, nil)
	for b.Loop() {
		m.Add(x)
	}
	b.ReportMetric(float64(b.N)/b.Elapsed().Seconds(), "s/s")
}
