package pair

import (
	"errors"
	"fmt"
	"io"
	"math"
	"math/rand/v2"
	"os"
	"strconv"
	"strings"
	"testing"

	"fettle/audio"
	"fettle/audit/figures"
	"fettle/filter/response"

	goaudio "github.com/go-audio/audio"
)

const rate = 8000

// renders is the chain of these tests and what it does.
func renders() ([]response.Section, *figures.Figures) {
	sections := []response.Section{highpass(100, rate), lowpass(1500, rate)}
	return sections, figures.Measure(figures.Response{H: response.Impulse(sections, 4000), Rate: rate})
}

func compared(t testing.TB, original, processed Opener) *Report {
	t.Helper()
	r, err := Measure(original, processed)
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// filteredBy measures a pair that must be seen as one.
func filteredBy(t testing.TB, x, y []float64) (*Report, *Result) {
	t.Helper()
	r := compared(t, of(rate, x), of(rate, y))
	if r.Verdict != Filtered || r.Channels[0].Absent != "" {
		t.Fatalf("verdict %s, %s", r.Verdict, r.Reason)
	}
	return r, r.Channels[0]
}

// Renders of speech-like and music-like material, with the noise of 24 bits and of a poor
// converter: band arrivals lie in their intervals, pooled over bands, in 92 to 99 % of cases. The
// bands of one recording share little but the few loud groups; FETTLE_TRIALS asks for more
// recordings of each kind than these.
func TestIntervalsHoldTheTruth(t *testing.T) {
	t.Parallel()
	trials := 2
	if n, err := strconv.Atoi(os.Getenv("FETTLE_TRIALS")); err == nil {
		trials = n
	}
	sections, want := renders()
	held, all := 0, 0
	for name, material := range map[string]func(int, int, uint64) []float64{"speech": speechLike, "music": musicLike} {
		for _, noise := range []float64{1e-7, 1e-3} {
			own, count := 0, 0
			for seed := range uint64(trials) {
				x := material(rate, 20*rate, seed)
				_, c := filteredBy(t, x, through(x, sections, 150, -0.5, noise, seed))
				if c.Polarity != -want.Polarity {
					t.Errorf("%s: polarity %d, want %d", name, c.Polarity, -want.Polarity)
				}
				for i, b := range want.Bands {
					if got := c.Bands[i]; !math.IsNaN(got.Arrival) {
						count++
						if math.Abs(got.Arrival+c.Delay/rate-b.Arrival-(150+want.Latency)/rate) <= math.Hypot(got.ArrivalErr, c.DelayErr/rate) {
							own++
						}
					}
				}
			}
			t.Logf("%s, noise %g: %d of %d", name, noise, own, count)
			if count < trials*15 {
				t.Errorf("%s, noise %g: only %d bands stated", name, noise, count)
			}
			held, all = held+own, all+count
		}
	}
	if share := float64(held) / float64(all); !(share >= 0.92 && share <= 0.99) {
		t.Errorf("%d of %d intervals hold the truth, %.3f, want 0.92 to 0.99", held, all, share)
	}
}

// Without noise to speak of the figures are those of the chain.
func TestFiguresOfARender(t *testing.T) {
	t.Parallel()
	sections, want := renders()
	x := speechLike(rate, 20*rate, 3)
	r, c := filteredBy(t, x, through(x, sections, 777, 2, 1e-7, 1))
	within(t, "delay", c.Delay, 777+want.Latency, 1e-3)
	first, last := math.Inf(1), math.Inf(-1)
	for i, b := range want.Bands {
		if c.Bands[i].Carried {
			first, last = min(first, b.Arrival), max(last, b.Arrival)
		}
	}
	within(t, "delay spread", c.DelaySpread, last-first, 1e-6+3*c.DelaySpreadErr)
	if r.Lag < 770 || r.Lag > 785 || math.Abs(r.Drift) > 0.01 {
		t.Errorf("lag %d, drift %g ppm", r.Lag, r.Drift)
	}
	for i, b := range want.Bands {
		got := c.Bands[i]
		within(t, "gain", got.Gain, b.Gain+20*math.Log10(2), 0.002)
		within(t, "arrival", got.Arrival, b.Arrival, 5e-6)
		within(t, "spread", got.Spread, b.Spread, 2e-5)
		if !(got.Coherence > 0.99) {
			t.Errorf("%g Hz: coherence %g", b.Nominal, got.Coherence)
		}
	}
	for i, hz := range c.Curve.Hz {
		if hz < 30 || hz > 3000 {
			continue
		}
		h := response.SectionsAt(sections, 2*math.Pi*hz/rate)
		tau := response.SectionsGroupDelay(sections, 2*math.Pi*hz/rate)
		// The nearest of bins a tenth of a hertz apart.
		within(t, "curve", c.Curve.Magnitude[i], 20*math.Log10(2*math.Hypot(real(h), imag(h))), 0.03)
		within(t, "group delay", c.Curve.GroupDelay[i], (777+tau)/rate, 2e-5)
	}
	plain := through(x, nil, 0, 0.25, 0, 1)
	_, c = filteredBy(t, x, plain)
	within(t, "gain of a plain copy", c.Gain, 20*math.Log10(0.25), 1e-6)
	within(t, "delay of a plain copy", c.Delay, 0, 1e-6)
}

// Delays of many seconds, either way, found over recordings of unequal length.
func TestLargeDelays(t *testing.T) {
	t.Parallel()
	x := speechLike(rate, 20*rate, 5)
	for _, delay := range []int{7*rate + 1234, -5*rate - 77} {
		y := make([]float64, 18*rate)
		for n := range y {
			if m := n - delay; m >= 0 && m < len(x) {
				y[n] = -0.5 * x[m]
			}
		}
		_, c := filteredBy(t, x, y)
		within(t, "delay", c.Delay, float64(delay), 1e-4)
		if c.Polarity != -1 {
			t.Errorf("polarity %d, want -1", c.Polarity)
		}
	}
}

// What is no linear filter's work is said to be none.
func TestVerdicts(t *testing.T) {
	t.Parallel()
	const seconds = 12
	x := speechLike(rate, seconds*rate, 1)
	music := musicLike(rate, seconds*rate, 1)
	noise := make([]float64, len(x))
	tone := make([]float64, len(x))
	rectified := make([]float64, len(x))
	r := rand.New(rand.NewPCG(3, 1))
	for n := range x {
		noise[n] = 0.1 * r.NormFloat64()
		tone[n] = 0.5 * math.Sin(2*math.Pi*440*float64(n)/rate)
		rectified[n] = math.Abs(noise[n])
	}
	buried := through(x, nil, 0, 1e-3, 0.3, 1)
	for _, c := range []struct {
		name    string
		x, y    []float64
		verdict Verdict
		says    string
	}{
		{"another recording", x, music, Unrelated, "not related"},
		{"noise", x, noise, Unrelated, "not related"},
		{"rectified", noise, rectified, Unrelated, "not related"},
		{"buried in noise", x, buried, Unrelated, "not related"},
		{"a tone", tone, tone, Unrelated, "repeat"},
		{"silent original", make([]float64, len(x)), x, Silent, "original is silent"},
		{"silent copy", x, make([]float64, len(x)), Silent, "processed recording is silent"},
		{"played 8.8 % faster", x, slowed(x, 44.1/48), Resampled, "1.088"},
		{"played 0.1 % slower", x, slowed(x, 1.001), Resampled, "0.999"},
		{"another clock", x, slowed(x, 1+50e-6), Drifting, "ppm"},
	} {
		t.Run(c.name, func(t *testing.T) {
			report := compared(t, of(rate, c.x), of(rate, c.y))
			if report.Verdict != c.verdict || !strings.Contains(report.Reason, c.says) {
				t.Errorf("%s, %q; want %s with %q", report.Verdict, report.Reason, c.verdict, c.says)
			}
			for _, ch := range report.Channels {
				if c.verdict != Unrelated && ch.Absent == "" {
					t.Error("figures are stated")
				}
			}
		})
	}
}

// slowed is x with so many samples for one, by a sinc of 65 points under a Hann window.
func slowed(x []float64, stretch float64) []float64 {
	y := make([]float64, int(float64(len(x))*stretch))
	cut := min(1, stretch)
	for n := range y {
		at := float64(n) / stretch
		base := int(at)
		for k := max(base-32, 0); k <= min(base+32, len(x)-1); k++ {
			u := (at - float64(k)) * cut
			w := 0.5 + 0.5*math.Cos(math.Pi*(at-float64(k))/33)
			if u != 0 {
				w *= math.Sin(math.Pi*u) / (math.Pi * u)
			}
			y[n] += cut * x[k] * w
		}
	}
	return y
}

// Drift is named, 50 ppm within 2, and a drift of a fraction of a sample over the recording is
// not overlooked.
func TestDriftIsNamed(t *testing.T) {
	t.Parallel()
	x := speechLike(rate, 20*rate, 2)
	for _, ppm := range []float64{50, -50, 2} {
		r := compared(t, of(rate, x), of(rate, slowed(x, 1+ppm*1e-6)))
		if r.Verdict != Drifting {
			t.Fatalf("%g ppm: %s, %s", ppm, r.Verdict, r.Reason)
		}
		within(t, "drift", r.Drift, ppm, 0.04*math.Abs(ppm))
	}
}

// Bands in which the processed recording holds something else are not stated; the rest is.
func TestIncoherentBandsAreNotStated(t *testing.T) {
	t.Parallel()
	x := musicLike(rate, 14*rate, 4)
	other := make([]float64, len(x))
	r := rand.New(rand.NewPCG(6, 6))
	for n := range other {
		other[n] = r.NormFloat64()
	}
	low := through(other, []response.Section{lowpass(60, rate), lowpass(60, rate), lowpass(60, rate)}, 0, 3, 0, 1)
	y := through(x, nil, 10, 1, 0, 1)
	for n := range y {
		y[n] += low[n]
	}
	_, c := filteredBy(t, x, y)
	stated := 0
	for i, b := range c.Bands {
		if math.IsNaN(b.Arrival) {
			if c.NotStated[fmt.Sprintf("bands[%g Hz]", b.Nominal)] == "" || b.Carried {
				t.Errorf("%g Hz: no reason, or carried", b.Nominal)
			}
			if b.Nominal > 400 {
				t.Errorf("%g Hz, coherence %.3f, is not stated", b.Nominal, b.Coherence)
			}
			continue
		}
		stated++
		if b.Nominal < 50 {
			t.Errorf("%g Hz is stated at a coherence of %.3f", b.Nominal, b.Coherence)
		}
		within(t, "arrival", b.Arrival, 0, 4*c.Bands[i].ArrivalErr+1e-7)
	}
	if stated < 10 {
		t.Errorf("only %d bands are stated", stated)
	}
}

// Channels are compared one by one; one may be silent.
func TestChannels(t *testing.T) {
	t.Parallel()
	a, b := speechLike(rate, 8*rate, 1), musicLike(rate, 8*rate, 2)
	silent := make([]float64, len(a))
	r := compared(t, of(rate, a, b, silent), of(rate, through(a, nil, 5, 1, 1e-6, 1), through(b, nil, 9, -2, 1e-6, 2), silent))
	if r.Verdict != Filtered || len(r.Channels) != 3 {
		t.Fatalf("%s, %d channels", r.Verdict, len(r.Channels))
	}
	within(t, "delay of channel 1", r.Channels[0].Delay, 5, 1e-3)
	within(t, "delay of channel 2", r.Channels[1].Delay, 9, 1e-3)
	within(t, "gain of channel 2", r.Channels[1].Gain, 20*math.Log10(2), 1e-3)
	if r.Channels[2].Absent == "" {
		t.Error("a silent channel has figures")
	}
	if _, err := Measure(of(rate, a, b), of(rate, a)); err == nil || !strings.Contains(err.Error(), "channels") {
		t.Errorf("two channels against one: %v", err)
	}
	if r := compared(t, of(rate, a), of(16000, a)); r.Verdict != Resampled || !strings.Contains(r.Reason, "16000") {
		t.Errorf("another rate: %s, %s", r.Verdict, r.Reason)
	}
	if r := compared(t, of(rate, a[:500]), of(rate, a[:500])); r.Verdict == Filtered {
		t.Error("500 frames are enough for figures")
	}
}

// Errors of opening and reading come through, at whichever pass they occur, and what was
// opened is closed.
func TestErrorsComeThrough(t *testing.T) {
	t.Parallel()
	x := speechLike(rate, 3*rate, 1)
	broken := errors.New("the disk is gone")
	open := 0
	counted := func(o Opener, failAt int) Opener {
		calls := 0
		return func() (audio.Source, error) {
			calls++
			src, err := o()
			if err != nil {
				return nil, err
			}
			open++
			return &closing{src, &open, calls == failAt, broken}, nil
		}
	}
	for failAt := 1; ; failAt++ {
		_, err := Measure(counted(of(rate, x), failAt), counted(of(rate, x), 0))
		if open != 0 {
			t.Fatalf("failing at call %d leaves %d sources open", failAt, open)
		}
		if err == nil {
			if failAt < 4 {
				t.Errorf("call %d fails and no one says so", failAt)
			}
			break
		}
		if !errors.Is(err, broken) {
			t.Errorf("failing at call %d: %v", failAt, err)
		}
	}
	if _, err := Measure(func() (audio.Source, error) { return nil, broken }, of(rate, x)); !errors.Is(err, broken) {
		t.Errorf("a recording that does not open: %v", err)
	}
}

// closing fails at its first read if it is to.
type closing struct {
	audio.Source
	open *int
	fail bool
	err  error
}

func (c *closing) ReadFrames(dst []float64) (int, error) {
	if c.fail {
		return 0, c.err
	}
	return c.Source.ReadFrames(dst)
}

func (c *closing) Close() error {
	*c.open--
	return nil
}

// Windows stand where they should, however far they jump: sample n of the recordings is n.
func TestWindowsOnARamp(t *testing.T) {
	t.Parallel()
	const size, lag = 64, 7
	x, y := make([]float64, 4000), make([]float64, 4000)
	for n := range x {
		x[n], y[n] = float64(n), float64(n-lag)
	}
	for _, jumps := range [][]int{{0, 1, 2, 3}, {0, 2, 5, 9, 14, 20}, {3, 4, 8, 9, 50}} {
		c := &comparison{openOriginal: of(rate, x), openProcessed: of(rate, y), channels: 1, lag: lag,
			original: &envelope{frames: 4000}, processed: &envelope{frames: 4000}}
		w, err := c.openWindows(size)
		if err != nil {
			t.Fatal(err)
		}
		for _, segment := range jumps {
			if err := w.moveTo(segment, lag); err != nil {
				t.Fatal(err)
			}
			at := float64(segment * size / 2)
			if w.x.planes[0][0] != at || w.segment(0)[0] != at+size/2 || w.y.planes[0][0] != at+size/2 ||
				w.x.planes[0][2*size-1] != at+2*size-1 || w.y.planes[0][size-1] != at+size/2+size-1 {
				t.Errorf("jumps %v, segment %d: original from %g, its middle from %g, processed from %g",
					jumps, segment, w.x.planes[0][0], w.segment(0)[0], w.y.planes[0][0])
			}
		}
		w.close()
	}
}

// Pieces of a recording are what they should be: overlapping, beyond both ends, far apart.
func TestPiecesOnARamp(t *testing.T) {
	t.Parallel()
	x := make([]float64, 9000)
	for n := range x {
		x[n] = float64(n + 1)
	}
	from := []int64{-50, -10, 0, 40, 5000, 8950, 9100}
	err := readPieces(of(rate, x), 0, len(from), func(i int) (int64, int) { return from[i], 100 }, func(i int, piece []float64) {
		for j, v := range piece {
			want := 0.0
			if n := from[i] + int64(j); n >= 0 && n < int64(len(x)) {
				want = float64(n + 1)
			}
			if v != want {
				t.Fatalf("piece from %d, sample %d: %g, want %g", from[i], j, v, want)
			}
		}
	})
	if err != nil {
		t.Fatal(err)
	}
}

// Long recordings have longer steps in their envelopes, so that memory is bounded.
func TestEnvelopeHalves(t *testing.T) {
	t.Parallel()
	e := &envelope{step: 10, energy: [][]float64{{1, 2, 3, 4, 5}}}
	e.halve()
	if e.step != 20 || fmt.Sprint(e.energy[0]) != "[3 7]" {
		t.Errorf("step %d, %v; want 20, [3 7]", e.step, e.energy[0])
	}
}

// lengthless hides how long a source is.
type lengthless struct{ audio.Source }

func (lengthless) Frames() int64 { return -1 }

// Sources of unknown length, read in small pieces, give the same report.
func TestUnknownLength(t *testing.T) {
	t.Parallel()
	x := speechLike(rate, 4*rate, 1)
	y := through(x, nil, 40, 1, 1e-5, 1)
	_, want := filteredBy(t, x, y)
	odd := func(z []float64) Opener {
		return func() (audio.Source, error) {
			src := audio.FromFrames(&goaudio.Format{SampleRate: rate, NumChannels: 1}, z)
			return lengthless{short{src}}, nil
		}
	}
	r := compared(t, odd(x), odd(y))
	if got := r.Channels[0]; got.Delay != want.Delay || got.Gain != want.Gain {
		t.Errorf("delay %g, gain %g; want %g, %g", got.Delay, got.Gain, want.Delay, want.Gain)
	}
}

// short reads less than it is asked to.
type short struct{ audio.Source }

func (s short) ReadFrames(dst []float64) (int, error) {
	return s.Source.ReadFrames(dst[:min(len(dst), 333)])
}

var _ io.Closer = (*closing)(nil)

// Of a long recording each part is stood for by its loudest run of segments.
func TestSpans(t *testing.T) {
	t.Parallel()
	const size, count = 64, 2400
	e := &envelope{step: size / 2, energy: [][]float64{make([]float64, count+4)}}
	for i := range e.energy[0] {
		e.energy[0][i] = 1
	}
	for part := range mostGroups {
		e.energy[0][part*200+120] = 100 // in the middle of segments about this one
	}
	c := &comparison{original: e}
	spans := c.spans(&windows{size: size, count: count})
	if len(spans) != mostGroups {
		t.Fatalf("%d spans, want %d", len(spans), mostGroups)
	}
	for part, s := range spans {
		if s.to-s.from != mostSegments/mostGroups || s.from < part*200 || s.to > (part+1)*200 ||
			part*200+120 < s.from || part*200+120 > s.to+2 {
			t.Errorf("part %d: segments %d to %d; want %d about %d", part, s.from, s.to, mostSegments/mostGroups, part*200+120)
		}
	}
}

func BenchmarkMeasure(b *testing.B) {
	const rate, seconds = 48000, 120
	x := speechLike(rate, seconds*rate, 1)
	y := through(x, []response.Section{highpass(80, rate)}, 500, 1, 1e-5, 1)
	b.SetBytes(int64(len(x)))
	for b.Loop() {
		if r, err := Measure(of(rate, x), of(rate, y)); err != nil || r.Verdict != Filtered {
			b.Fatal(r, err)
		}
	}
}
