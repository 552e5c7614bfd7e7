package probe

import (
	"errors"
	"io"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"fettle/audio"
	"fettle/filter/response"

	goaudio "github.com/go-audio/audio"
	"pgregory.net/rapid"
)

func planned(t testing.TB, r Request) Parameters {
	t.Helper()
	p, err := r.Plan()
	if err != nil {
		t.Fatal(err)
	}
	return p
}

func within(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if diff := math.Abs(got - want); !(diff <= tol) {
		t.Errorf("%s: got %.10g, want %.10g, off by %.3g, allowed %.3g", what, got, want, diff, tol)
	}
}

// all reads a source in calls of so many frames.
func all(t testing.TB, src audio.Source, frames int) []float64 {
	t.Helper()
	var x []float64
	for buf := make([]float64, frames*src.Format().NumChannels); ; {
		n, err := src.ReadFrames(buf)
		if err == io.EOF {
			return x
		}
		if err != nil {
			t.Fatal(err)
		}
		x = append(x, buf[:n*src.Format().NumChannels]...)
	}
}

// A sweep of 10 s from 20 Hz to 20 kHz at 48 kHz grows by e in 1.447648 s (L = T/ln(f2/f1)); its
// products of order 2 to 5 arrive 48164.8, 76339.4, 96329.6 and 111835.2 samples early: recomputed
// from Farina (2000) and, for orders 2 and 3, found by convolution elsewhere.
func TestOrderLeadAgainstFarina(t *testing.T) {
	r := Defaults(Chirp, 48000)
	r.From, r.To = 20*math.Sqrt2, 20000*0.92 // the tapers reach to 20 Hz and 20 kHz
	p := planned(t, r)
	within(t, "L, s", p.growth()/48000, 1.447648, 1e-6)
	for order, want := range map[float64]float64{2: 48164.8, 3: 76339.4, 4: 96329.6, 5: 111835.2} {
		within(t, "lead", p.OrderLead(order), want, 0.05)
	}
	if p := planned(t, Defaults(Impulse, 48000)); p.OrderLead(2) != 0 {
		t.Errorf("an impulse separates orders by %g samples", p.OrderLead(2))
	}
}

// The chirp passes frequency f at L·ln(f/f1): its zero crossings there are 1/(2f) apart. And
// its spectrum falls by 3.01 dB an octave.
func TestChirpSweepsExponentially(t *testing.T) {
	p := planned(t, Defaults(Chirp, 48000))
	x := p.Once(1)
	for _, hz := range []float64{30, 100, 1000} {
		at := int(p.growth() * math.Log(hz/p.start()))
		crossings := 0
		var first, last float64
		for n := at - int(24000*2/hz); n < at+int(24000*2/hz); n++ {
			if x[n] < 0 != (x[n+1] < 0) {
				c := float64(n) + x[n]/(x[n]-x[n+1])
				if crossings == 0 {
					first = c
				}
				last = c
				crossings++
			}
		}
		found := 48000 * float64(crossings-1) / (last - first) / 2
		within(t, "frequency", found, hz, 0.01*hz)
	}
	size := response.NextPow2(len(x))
	bins := response.Spectrum(x, size)
	power := func(hz float64) float64 { // over a twelfth of an octave
		var sum, count float64
		for k := int(hz * 0.97 / 48000 * float64(size)); k < int(hz*1.03/48000*float64(size)); k++ {
			sum += real(bins[k])*real(bins[k]) + imag(bins[k])*imag(bins[k])
			count++
		}
		return 10 * math.Log10(sum/count)
	}
	for hz := 20.0; hz < 8000; hz *= 2 {
		within(t, "dB an octave", power(2*hz)-power(hz), -3.0103, 0.05)
	}
}

// Seen by a clock that runs faster, the chirp is the same curve at more points.
func TestOnceStretched(t *testing.T) {
	p := planned(t, Defaults(Chirp, 8000))
	plain, double := p.Once(1), p.Once(2)
	for n, v := range plain {
		if d := math.Abs(double[2*n] - v); !(d < 1e-9) { // rounding of a phase of 2π·5000 turns
			t.Fatalf("sample %d: %g at half the step, %g", n, double[2*n], v)
		}
	}
}

func TestDefaults(t *testing.T) {
	for _, kind := range []Kind{Chirp, Impulse} {
		p := planned(t, Defaults(kind, 48000))
		if p.Repeats < 3 || p.Level != -20 {
			t.Errorf("%s: %d repeats at %g dBFS, want at least 3 at -20", kind, p.Repeats, p.Level)
		}
		var peak float64
		for _, v := range all(t, p.Source(), 1000) {
			peak = max(peak, math.Abs(v))
		}
		within(t, "peak", peak, 0.1, 1e-6)
	}
}

// From repeat to repeat hum turns: the sum of three repeats of 50 Hz is nothing, of
// 60 Hz a fifth.
func TestRepeatsAreOffMains(t *testing.T) {
	for _, seconds := range []float64{1, 5, 10, 7.77} {
		r := Defaults(Chirp, 48000)
		r.Seconds = seconds
		p := planned(t, r)
		for _, mains := range []float64{50, 60} {
			turn := mains * float64(p.Period) / 48000
			re, im := 1.0, 0.0
			for k := 1.0; k < 3; k++ {
				re += math.Cos(2 * math.Pi * k * turn)
				im += math.Sin(2 * math.Pi * k * turn)
			}
			if left := math.Hypot(re, im) / 3; left > 0.21 {
				t.Errorf("%g s: %.2f of %g Hz hum is left in the mean of 3 repeats", seconds, left, mains)
			}
		}
	}
}

// A stream is the same however it is read, and every channel has the signal.
func TestSourceInPieces(t *testing.T) {
	r := Defaults(Chirp, 8000)
	r.Seconds, r.Channels, r.Dither = 0.5, 2, 16
	p := planned(t, r)
	want := all(t, p.Source(), 1<<20)
	if len(want) != 2*int(p.Frames()) {
		t.Fatalf("%d samples, want %d", len(want), 2*p.Frames())
	}
	for _, frames := range []int{1, 7, 4096} {
		got := all(t, p.Source(), frames)
		for i, v := range want {
			if got[i] != v {
				t.Fatalf("in calls of %d frames sample %d is %g, want %g", frames, i, got[i], v)
			}
		}
	}
	once := p.Once(1)
	for n, v := range once {
		for c := range 2 {
			if d := math.Abs(want[2*(p.Lead+p.Period+n)+c] - v); d > math.Exp2(-15) {
				t.Fatalf("second repeat, frame %d, channel %d: off by %g", n, c, d)
			}
		}
	}
}

// Triangular dither of two steps peak to peak has a sixth of a step squared of power
// (Lipshitz, Wannamaker and Vanderkooy 1992), differs between channels, and makes an impulse far
// below a step come through a quantiser in the mean.
func TestDitheredImpulse(t *testing.T) {
	r := Defaults(Impulse, 8000)
	r.Level, r.Dither, r.Repeats, r.Channels = -86, 14, 400, 2
	p := planned(t, r)
	x := all(t, p.Source(), 4096)
	step := math.Exp2(-13)
	var power, product, mean float64
	for n := range p.Frames() {
		power += x[2*n] * x[2*n]
		product += x[2*n] * x[2*n+1]
	}
	within(t, "power of dither, steps²", power/float64(p.Frames())/step/step, 1.0/6, 0.002)
	// Over 3.2 million frames an uncorrelated product stays within five deviations, 5/√n.
	within(t, "correlation of channels", product/power, 0, 5/math.Sqrt(float64(p.Frames())))
	for k := range p.Repeats {
		mean += step * math.Round(x[2*(p.Lead+k*p.Period)]/step) / float64(p.Repeats)
	}
	// The quantised, dithered sample has a variance of a quarter step² in all.
	within(t, "mean of the quantised impulse", mean, p.Amplitude(), 4*step/2/math.Sqrt(400))
	if p.Amplitude() > step/2 {
		t.Error("the impulse is no smaller than half a step: the test shows nothing")
	}
}

func TestEncodeDecode(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		p := Parameters{
			Kind: Chirp, Rate: rapid.IntRange(8000, 192000).Draw(t, "rate"), Channels: rapid.IntRange(1, 8).Draw(t, "channels"),
			From: rapid.Float64Range(1, 500).Draw(t, "from"), To: rapid.Float64Range(2000, 3680).Draw(t, "to"),
			Level: rapid.Float64Range(-120, 0).Draw(t, "level"), Dither: rapid.IntRange(0, 32).Draw(t, "dither"),
			Lead: rapid.IntRange(0, 1000).Draw(t, "lead"), Signal: rapid.IntRange(1, 1<<20).Draw(t, "signal"),
			Repeats: rapid.IntRange(1, 1000).Draw(t, "repeats"),
		}
		p.Period = p.Signal + rapid.IntRange(1, 1<<20).Draw(t, "pause")
		got, err := Decode(p.Encode())
		if err != nil || got != p {
			t.Fatalf("%+v came back as %+v, %v", p, got, err)
		}
		if got, err := Decode(append(p.Encode(), 0)); err != nil || got != p { // a pad byte
			t.Fatalf("with a pad byte: %+v, %v", got, err)
		}
	})
}

func TestDecodeRefuses(t *testing.T) {
	good := string(planned(t, Defaults(Chirp, 48000)).Encode())
	for name, c := range map[string]struct{ payload, says string }{
		"nothing":        {"", "EOF"},
		"no JSON":        {"probe", "invalid"},
		"other schema":   {strings.Replace(good, Schema, "fettle.probe/9", 1), "fettle.probe/9"},
		"unknown key":    {strings.Replace(good, `"kind"`, `"shape":1,"kind"`, 1), "shape"},
		"unknown kind":   {strings.Replace(good, `"chirp"`, `"noise"`, 1), "noise"},
		"two objects":    {good + good, "follows"},
		"absurd repeats": {strings.Replace(good, `"repeats":3`, `"repeats":3000000`, 1), "3000000"},
		"period":         {strings.Replace(good, `"signal_frames":480000`, `"signal_frames":16777216`, 1), "16777216"},
		"above the band": {strings.Replace(good, `"to_hz":22080`, `"to_hz":24000`, 1), "24000"},
		"long":           {good + strings.Repeat(" ", 5000), "bytes"},
	} {
		_, err := Decode([]byte(c.payload))
		if !errors.Is(err, ErrNoProbe) || !strings.Contains(err.Error(), c.says) {
			t.Errorf("%s: %v; want ErrNoProbe with %q", name, err, c.says)
		}
	}
}

func FuzzDecode(f *testing.F) {
	f.Add(Parameters{}.Encode())
	p, _ := Defaults(Chirp, 48000).Plan()
	f.Add(p.Encode())
	p, _ = Defaults(Impulse, 8000).Plan()
	f.Add(p.Encode())
	f.Fuzz(func(t *testing.T, b []byte) {
		p, err := Decode(b)
		if err != nil {
			return
		}
		if err := p.Check(); err != nil {
			t.Errorf("decoded what does not pass: %v", err)
		}
		if again, err := Decode(p.Encode()); err != nil || again != p {
			t.Errorf("%+v does not come back: %+v, %v", p, again, err)
		}
	})
}

func TestPlanRefuses(t *testing.T) {
	for says, change := range map[string]func(*Request){
		"seconds":  func(r *Request) { r.Seconds = math.NaN() },
		"pause":    func(r *Request) { r.Pause = 0 },
		"repeats":  func(r *Request) { r.Repeats = 0 },
		"level":    func(r *Request) { r.Level = 3 },
		"octaves":  func(r *Request) { r.To = 30 },
		"channels": func(r *Request) { r.Channels = 0 },
		"rate":     func(r *Request) { r.Rate = 0 },
		"dither":   func(r *Request) { r.Dither = 40 },
		"kind":     func(r *Request) { r.Kind = "noise" },
	} {
		r := Defaults(Chirp, 48000)
		change(&r)
		if _, err := r.Plan(); err == nil || !strings.Contains(err.Error(), says) {
			t.Errorf("%+v: %v; want an error with %q", r, err, says)
		}
	}
}

func TestUnmeasured(t *testing.T) {
	p := planned(t, Defaults(Chirp, 48000))
	for hz, want := range map[float64]float64{0: 1, 5: 1, 10: 0, 1000: 0, 22080: 0, 23700: 1, 24000: 1} {
		within(t, "share not measured", p.Unmeasured(hz), want, 1e-12)
	}
	// Where something is said, the taper still stands at a tenth or more.
	for hz := 7.1; hz < 10; hz += 0.01 {
		if level := taper(math.Log(hz/p.start()) / math.Log(p.From/p.start())); p.Unmeasured(hz) < 1-1e-9 && level < 0.099 {
			t.Fatalf("%g Hz: said to be measured, its level is %g", hz, level)
		}
	}
}

// Verify takes a probe as a file of 16 bits holds it, and nothing else.
func TestVerify(t *testing.T) {
	r := Defaults(Chirp, 8000)
	r.Seconds, r.Dither = 0.5, 16
	p := planned(t, r)
	x := all(t, p.Source(), 4096)
	format := &goaudio.Format{SampleRate: 8000, NumChannels: 1}
	quantised := make([]float64, len(x))
	random := rand.New(rand.NewPCG(1, 1))
	for i, v := range x {
		quantised[i] = math.Round(v*32768+random.Float64()-random.Float64()) / 32768
	}
	if err := p.Verify(audio.FromFrames(format, quantised)); err != nil {
		t.Errorf("the probe in 16 bits: %v", err)
	}
	louder := make([]float64, len(x))
	for i, v := range x {
		louder[i] = 1.05 * v
	}
	for name, y := range map[string][]float64{
		"louder": louder, "shorter": x[:len(x)-1], "longer": append(append([]float64(nil), x...), 0), "later": append([]float64{0}, x[:len(x)-1]...),
	} {
		var altered *AlteredError
		if err := p.Verify(audio.FromFrames(format, y)); !errors.As(err, &altered) {
			t.Errorf("%s: %v, want AlteredError", name, err)
		}
		unknown := lengthless{audio.FromFrames(format, y)}
		if err := p.Verify(unknown); !errors.As(err, &altered) {
			t.Errorf("%s, length not known: %v, want AlteredError", name, err)
		}
	}
}

type lengthless struct{ audio.Source }

func (lengthless) Frames() int64 { return -1 }

func TestCautionSaysWhatItMust(t *testing.T) {
	for _, word := range []string{"ears", "tweeter", "headphones", "volume", "local rules"} {
		if !strings.Contains(Caution, word) {
			t.Errorf("the caution does not speak of %s", word)
		}
	}
}
