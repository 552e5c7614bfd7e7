package onsets

import (
	"errors"
	"fmt"
	"io"
	"math"
	"strings"
	"testing"

	"fettle/audio"
	"fettle/audit/figures"
	"fettle/filter"

	goaudio "github.com/go-audio/audio"
	"github.com/google/go-cmp/cmp"
	"github.com/google/go-cmp/cmp/cmpopts"
)

// A recording and itself: nothing moves, nothing is early, whatever it holds.
func TestIdentity(t *testing.T) {
	x, at := strikes(16000, 30, 0.4, 1e-4)
	c, list := compared(t, 16000, x, x)
	if c.Onsets < len(at)-1 || c.Lost > 0 {
		t.Fatalf("%d of %d onsets, %d lost", c.Onsets, len(at), c.Lost)
	}
	if c.Early[0].Count < 10 {
		t.Errorf("early energy is told of %d onsets only", c.Early[0].Count)
	}
	for _, o := range list {
		within(t, "shift", o.Shift, 0, 1e-12)
		if !math.IsNaN(o.Rise) {
			within(t, "rise change", o.RiseChange, 0, 1e-12)
		}
		for _, level := range o.Early {
			if level > figures.None {
				t.Errorf("%.4f s: early %v over %g", o.Time, o.Early, o.Floor)
			}
		}
	}
}

// A delay by whole samples, another gain and the other polarity are no more than
// that: exact to the rounding of a time of seconds.
func TestWholeDelays(t *testing.T) {
	for _, rate := range []int{8000, 48000} {
		x, _ := strikes(rate, 10, 0.4, 1e-4)
		for _, samples := range []int{1, -3, 17, 5 * rate / 1000, -9 * rate / 1000, 15 * rate / 1000} {
			c, list := compared(t, rate, x, scaled(delayed(x, samples), -0.3))
			if c.Onsets < 20 || c.Lost > 0 {
				t.Fatalf("%d samples: %d onsets, %d lost", samples, c.Onsets, c.Lost)
			}
			want := float64(samples) / float64(rate)
			for _, o := range list {
				within(t, fmt.Sprintf("%d Hz, %d samples, shift", rate, samples), o.Shift, want, 1e-9)
				if !math.IsNaN(o.Rise) {
					within(t, "rise change", o.RiseChange, 0, 1e-9)
				}
			}
			within(t, "median", c.Shift.Median, want, 1e-9)
			within(t, "95th percentile", c.Shift.Percentile95, math.Abs(want), 1e-9)
			within(t, "worst", c.Shift.Worst, want, 1e-9)
		}
	}
}

// A delayed copy is found though a trace stands where the original does.
func TestTraceInPlace(t *testing.T) {
	x, _ := strikes(48000, 10, 0.4, 0)
	y := delayed(x, 15*48)
	for n, v := range x {
		y[n] += 1e-3 * v
	}
	c, _ := compared(t, 48000, x, y)
	if c.Shift.Count < 20 {
		t.Fatalf("%+v", c)
	}
	within(t, "median", c.Shift.Median, 15e-3, 1e-6)
	within(t, "worst", c.Shift.Worst, 15e-3, 0.2e-3)
}

// Fractions of a sample, of a signal that is known between samples: to a
// hundredth of one.
func TestFractionalDelays(t *testing.T) {
	for _, rate := range []int{8000, 48000} {
		fs := float64(rate)
		x := silence(rate, 6)
		at := []float64{1, 2.00013, 3.3, 4.77, 5.1}
		play := func(x []float64, delay float64) {
			for i, when := range at {
				tone(x, rate, fs/9+300*float64(i), when+delay, func(t float64) float64 {
					s := math.Sin(math.Pi / 2 * min(t/0.004, 1)) // within the band, as a recording is
					return 0.3 * s * s * math.Exp(-t/0.05)
				})
			}
		}
		play(x, 0)
		for _, samples := range []float64{0.1, 0.25, 0.5, 0.75, 0.9, -0.4, 7.3} {
			y := silence(rate, 6)
			play(y, samples/fs)
			c, list := compared(t, rate, x, y)
			if c.Onsets != len(at) || c.Lost > 0 {
				t.Fatalf("%d onsets, %d lost", c.Onsets, c.Lost)
			}
			for _, o := range list {
				within(t, fmt.Sprintf("%d Hz, %g samples", rate, samples), o.Shift*fs, samples, 0.01)
				// The envelope is flat near its peak, and at 8 kHz it has a
				// thousandth of ripple.
				within(t, "rise change in samples", o.RiseChange*fs, 0, 0.05)
			}
		}
	}
}

// Clicks between samples: band-limited pulses, a hundredth too.
func TestFractionalClicks(t *testing.T) {
	const rate = 48000
	pulses := func(delay float64) []float64 {
		x := silence(rate, 3)
		for _, at := range []float64{0.7, 1.1, 1.9, 2.4} {
			for n := range x {
				u := float64(n) - at*rate - delay
				if math.Abs(u) < 64 {
					x[n] += 0.5 * math.Cos(math.Pi*u/128) * math.Cos(math.Pi*u/128) * sinc(0.8*u)
				}
			}
		}
		return x
	}
	x := pulses(0)
	for _, samples := range []float64{0.1, 0.3, 0.5, 0.8} {
		c, list := compared(t, rate, x, pulses(samples))
		if c.Onsets != 4 {
			t.Fatalf("%d onsets", c.Onsets)
		}
		for _, o := range list {
			within(t, "samples", o.Shift*rate, samples, 0.01)
		}
	}
}

func sinc(x float64) float64 {
	if x == 0 {
		return 1
	}
	return math.Sin(math.Pi*x) / (math.Pi * x)
}

// A tone whose amplitude changes slowly comes later by the group delay at its
// frequency, and rises as before. An all-pass of second order has 4Q/Ω at its centre
// Ω, which the bilinear transform Ω = tan(ω/2) makes 4Q/Ω·(1 + Ω²)/2 samples.
func TestGroupDelayOfAnAllpass(t *testing.T) {
	const rate, f0 = 48000, 2000.0
	for _, q := range []float64{1, 4, 10} {
		x := silence(rate, 3)
		for _, at := range []float64{0.5, 1.2, 2} {
			tone(x, rate, f0, at, func(t float64) float64 {
				s := math.Sin(math.Pi / 2 * min(t/0.03, 1))
				return 0.3 * s * s
			})
			fadeOut(x, rate, at+0.3)
		}
		y := filtered(t, rate, x, fmt.Sprintf("allpass: {at: %g Hz, q: %g}", f0, q), filter.Written)
		c, list := compared(t, rate, x, y)
		if c.Onsets != 3 || c.Lost > 0 {
			t.Fatalf("%d onsets, %d lost", c.Onsets, c.Lost)
		}
		omega := math.Tan(math.Pi * f0 / rate)
		delay := 4*q/omega*(1+omega*omega)/2 - bulk(t, rate, q, f0)
		for _, o := range list {
			within(t, fmt.Sprintf("Q %g: shift in samples", q), o.Shift*rate, delay, 0.005*4*q/omega)
			within(t, "rise change in samples", o.RiseChange*rate, 0, 0.001*o.Rise*rate)
		}
	}
}

// bulk is how many samples of an all-pass's latency are removed to align it.
func bulk(t *testing.T, rate int, q, f0 float64) float64 {
	t.Helper()
	c, err := filter.Parse(fmt.Appendf(nil, "stages: [allpass: {at: %g Hz, q: %g}]", f0, q), "chain.yaml")
	if err != nil {
		t.Fatal(err)
	}
	f, err := c.Realise(rate, filter.Written)
	if err != nil {
		t.Fatal(err)
	}
	return float64(f.Latency(f.Paths()[0]).Removed)
}

func fadeOut(x []float64, rate int, at float64) {
	for n := int(at * float64(rate)); n < len(x); n++ {
		x[n] *= math.Max(0, 1-(float64(n)/float64(rate)-at)/0.05)
	}
}

// What a linear phase takes from both sides of a click stands ahead of it to the
// decibel; by minimum phase nothing does; backwards, all of it.
func TestEarlyEnergyByPhase(t *testing.T) {
	const rate = 48000
	const highpass = "highpass: {at: 70 Hz, order: 4}"
	at := []int{60000, 108000, 156001, 204007}
	x := silence(rate, 5)
	for _, n := range at {
		x[n] = 0.5
	}
	linear := filtered(t, rate, x, highpass, filter.Linear)
	minimum := filtered(t, rate, x, highpass, filter.Minimum)
	maximum := reversed(filtered(t, rate, reversed(x), highpass, filter.Minimum))
	for name, y := range map[string][]float64{"linear": linear, "maximum": maximum} {
		c, list := compared(t, rate, x, y)
		if c.Onsets != len(at) || c.Early[0].Count != len(at) {
			t.Fatalf("%s: %+v", name, c)
		}
		for i, o := range list {
			for j, want := range earlyBySums(y, rate, o.Time+o.Shift) {
				within(t, fmt.Sprintf("%s, onset %d, before %g s", name, i, EarlyTimes[j]), o.Early[j], want, 0.1)
			}
			within(t, "shift", o.Shift, 0, 5e-6)
		}
		t.Logf("%s: %.1f dB at %v s", name, list[0].Early, EarlyTimes)
	}
	_, want := compared(t, rate, x, linear)
	for _, samples := range []int{240, 700} {
		_, got := compared(t, rate, x, delayed(linear, samples))
		for i, o := range got {
			for j, level := range o.Early {
				within(t, "late as a whole", level, want[i].Early[j], 0.01)
			}
		}
	}
	c, _ := compared(t, rate, x, minimum)
	for i, s := range c.Early {
		if s.Count != len(at) || s.Worst != figures.None {
			t.Errorf("minimum phase, before %g s: %+v", EarlyTimes[i], s)
		}
	}
}

// earlyBySums is early energy by its definition, where all else is silent.
func earlyBySums(y []float64, rate int, onset float64) (levels [len(EarlyTimes)]float64) {
	pole := math.Exp(-2 * math.Pi * highpassHz / float64(rate))
	var before, out float64
	var early [len(EarlyTimes)]float64
	var energy float64
	for n, v := range y {
		out = (1+pole)/2*(v-before) + pole*out
		before = v
		since := float64(n)/float64(rate) - onset
		if since >= 0 && since < attackEnds {
			energy += out * out
		}
		for i, t := range EarlyTimes {
			if since >= -earlySpan && since < -t {
				early[i] += out * out
			}
		}
	}
	for i := range levels {
		levels[i] = 10 * math.Log10(early[i]/energy)
	}
	return levels
}

// Everything backwards changes the sign of time: what came later comes earlier.
func TestReversedTime(t *testing.T) {
	const rate = 16000
	x := silence(rate, 4)
	for _, at := range []float64{1, 2, 3} { // as sharp at either end
		tone(x, rate, 3000, at, func(t float64) float64 {
			if t > 0.2 {
				return 0
			}
			return 0.3
		})
	}
	y := delayed(x, 37)
	_, forward := compared(t, rate, x, y)
	_, backward := compared(t, rate, reversed(x), reversed(y))
	if len(forward) != 3 || len(backward) != 3 {
		t.Fatalf("%d and %d onsets", len(forward), len(backward))
	}
	for i := range forward {
		within(t, "forward", forward[i].Shift*rate, 37, 1e-5)
		within(t, "backward", backward[i].Shift*rate, -37, 1e-5)
	}
}

// Noise that swells ahead of an onset in the original is no pre-ring; the same in
// the processed recording only is.
func TestBreathBeforeAnOnset(t *testing.T) {
	const rate = 48000
	x, y := silence(rate, 6), silence(rate, 6)
	for i, at := range []float64{1, 2, 3, 4, 5} {
		strike := func(x []float64) { tone(x, rate, 1500, at, decay(0.02)) }
		strike(x)
		strike(y)
		breath := noise(silence(rate, 0.03), 0.01, uint64(i))
		copy(y[int((at-0.04)*rate):], breath)
		for n, v := range breath {
			x[int((at-0.04)*rate)+n] += v
		}
	}
	noise(x, 1e-5, 8)
	noise(y, 1e-5, 9)
	both, _ := compared(t, rate, x, y)
	if both.Early[0].Count < 5 || both.Early[0].Worst > figures.None {
		t.Errorf("in both: %+v", both.Early[0])
	}
	within(t, "floor", both.Floor.Median, 10*math.Log10(3*0.03e-4/(0.5*0.01)), 0.5)
	for _, at := range []int{1, 2, 3, 4, 5} {
		clear(x[at*rate-rate/10 : at*rate-rate/1000])
	}
	// 30 ms of 1e-4 over 50 ms of a tone that decays in 20 ms: 0.5·10 ms.
	c, _ := compared(t, rate, x, y)
	within(t, "in the processed recording", c.Early[0].Median, 10*math.Log10(0.03e-4/(0.5*0.01)), 0.5)
	within(t, "beyond 20 ms", c.Early[3].Median, 10*math.Log10(0.02e-4/(0.5*0.01)), 0.5)
}

// A background that hides anything over -20 dB leaves early energy not stated, with
// a reason.
func TestHiddenEarlyEnergy(t *testing.T) {
	const rate = 48000
	x := silence(rate, 6)
	for _, at := range []int{1, 2, 3, 4, 5} {
		x[at*rate] = 0.5
	}
	noise(x, 0.0005, 1)
	tone(x, rate, 700, 0, func(t float64) float64 { return 0.0017 * math.Sin(2*math.Pi*1.3*t) })
	c, list := compared(t, rate, x, x)
	if len(list) != 5 || c.Early[2].Count != 0 || c.NotStated["early_5ms"] == "" || c.NotStated["early_floor"] == "" {
		t.Errorf("%d onsets, early %+v, reasons %v", len(list), c.Early[2], c.NotStated)
	}
}

// An onset that the treatment takes away, or moves too far, is lost and says so.
func TestLostOnsets(t *testing.T) {
	x, _ := strikes(16000, 10, 0.4, 0)
	for name, y := range map[string][]float64{
		"silence":  silence(16000, 10),
		"constant": noise(silence(16000, 10), 0.1, 1),
	} {
		c, list := compared(t, 16000, x, y)
		if c.Onsets < 20 || c.Lost != c.Onsets || c.Shift.Count != 0 || !math.IsNaN(c.Shift.Worst) {
			t.Errorf("%s: %d onsets, %d lost, shift %+v", name, c.Onsets, c.Lost, c.Shift)
		}
		if c.NotStated["shift"] == "" || len(list) != c.Onsets {
			t.Errorf("%s: %d listed, reasons %v", name, len(list), c.NotStated)
		}
	}
	half := append(x[:80000:80000], silence(16000, 5)...)
	if c, _ := compared(t, 16000, x, half); c.Lost < 8 || c.Onsets-c.Lost < 8 {
		t.Errorf("half: %d onsets, %d lost", c.Onsets, c.Lost)
	}
}

// An onset into whose quiet the treatment spreads sound is no longer clear: neither
// shifted nor lost.
func TestBlurredOnsets(t *testing.T) {
	const rate = 48000
	x := silence(rate, 6)
	for _, at := range []float64{1, 2, 3, 4, 5} {
		tone(x, rate, 1500, at, decay(0.05))
	}
	y := noise(append([]float64{}, x...), 0, 1)
	for at := rate; at < 6*rate; at += rate {
		noise(y[at-rate*15/1000:at], 0.2, uint64(at)) // 11 dB under
	}
	c, _ := compared(t, rate, x, y)
	if c.Onsets != 5 || c.Blurred != 5 || c.Lost != 0 || c.Shift.Count != 0 || c.NotStated["shift"] == "" {
		t.Errorf("%+v", c)
	}
	// 15 ms of 0.04 up to 1 ms before, re 25 ms of 0.5 less what comes after 50 ms.
	within(t, "early", c.Early[0].Median, 10*math.Log10(0.014*0.04/(0.025*0.5*(1-math.Exp(-2)))), 0.3)
	// A tone that sounds all the time, 11 dB under.
	y = append([]float64{}, x...)
	tone(y, rate, 5200, 0, func(float64) float64 { return math.Pow(10, -11.0/20) })
	if c, _ := compared(t, rate, x, y); c.Blurred != 5 {
		t.Errorf("%d blurred under a tone, %d lost", c.Blurred, c.Lost)
	}
}

// A sound that sets in at once and one that takes its time: each level is reached
// when the formula says, though it is long after the original's peak.
func TestSmearedOnsets(t *testing.T) {
	const rate = 48000
	x, y := silence(rate, 6), silence(rate, 6)
	const long = 0.03
	for _, at := range []float64{1, 2, 3, 4, 5} {
		tone(x[:int((at+0.6)*rate)], rate, 4000, at, decay(0.02))
		tone(y[:int((at+0.6)*rate)], rate, 4000, at, func(t float64) float64 { return ramp(long)(t) * math.Exp(-max(t-long, 0)/0.02) })
	}
	c, list := compared(t, rate, x, y)
	if c.Onsets != 5 || c.Shift.Count != 5 {
		t.Fatalf("%+v", c)
	}
	// The window rounds the peak off: its first half is a line, its second a decay.
	for _, o := range list {
		within(t, "shift", o.Shift, math.Sqrt(0.1*0.96)*long+lead, 0.2e-3)
		within(t, "rise", o.Rise+o.RiseChange, (math.Sqrt(0.9*0.96)-math.Sqrt(0.1*0.96))*long, 0.5e-3)
	}
	// What takes 100 ms is no onset at all.
	z := silence(rate, 6)
	for _, at := range []float64{1, 2, 3, 4, 5} {
		tone(z[:int((at+0.6)*rate)], rate, 4000, at, func(t float64) float64 { return math.Min(t/0.1, math.Max(0, 4-t/0.15)) })
	}
	if c, _ := compared(t, rate, x, z); c.Blurred != 5 {
		t.Errorf("a swell: %+v", c)
	}
}

// A voice's first pulse is often weak, and its pulses are alike. A treatment that
// changes the balance but delays nothing must not be seen to move the onset by a
// pulse, nor to take another sound for it.
func TestVoice(t *testing.T) {
	const rate = 48000
	x := silence(rate, 12)
	for i := range 20 {
		begin := 0.5 + 0.55*float64(i)
		for p := range 12 {
			level := 0.05 + 0.3*min(float64(p), 1) // 17 dB
			pulse := x[int((begin+0.0125*float64(p))*rate):][:rate/20]
			tone(pulse, rate, 700+50*float64(i), 0, func(t float64) float64 { return level * math.Exp(-t/0.0025) })
			tone(pulse, rate, 3100, 0, func(t float64) float64 { return 0.2 * level * math.Exp(-t/0.001) })
		}
	}
	noise(x, 3e-4, 1)
	for _, stage := range []string{"highshelf: {at: 3 kHz, gain: 6 dB}", "bell: {at: 2 kHz, gain: -6 dB, q: 1}"} {
		c, _ := compared(t, rate, x, filtered(t, rate, x, stage, filter.Linear))
		t.Logf("%s: %d onsets, %d blurred, shift %.0f µs, worst %.0f", stage, c.Onsets, c.Blurred, 1e6*c.Shift.Median, 1e6*c.Shift.Worst)
		if c.Onsets != 20 || c.Shift.Count < 18 || !(math.Abs(c.Shift.Worst) < 0.3e-3) {
			t.Errorf("%s: %+v", stage, c)
		}
	}
	c, list := compared(t, rate, x, scaled(x, 0.7))
	within(t, "softer", c.Shift.Worst, 0, 1e-9)
	for i, o := range list {
		within(t, "the first pulse", o.Time, 0.5+0.55*float64(i), 0.5e-3)
	}
}

// Few onsets have a worst, but no median and no percentile.
func TestFewOnsets(t *testing.T) {
	for _, n := range []int{1, 4, 5, 19, 20} {
		x := silence(16000, float64(n+1)/2)
		for i := range n {
			x[(i+1)*8000-4000] = 0.3
		}
		c, _ := compared(t, 16000, x, x)
		if c.Onsets != n {
			t.Fatalf("%d onsets of %d", c.Onsets, n)
		}
		median, percentile := !math.IsNaN(c.Shift.Median), !math.IsNaN(c.Shift.Percentile95)
		if median != (n >= 5) || percentile != (n >= 20) || !(math.Abs(c.Shift.Worst) < 1e-12) {
			t.Errorf("%d onsets: %+v", n, c.Shift)
		}
		if median == (c.NotStated["shift.median"] != "") || percentile == (c.NotStated["shift.percentile_95"] != "") {
			t.Errorf("%d onsets: %v", n, c.NotStated)
		}
	}
}

// Channels are measured by themselves.
func TestChannels(t *testing.T) {
	const rate = 48000
	x, _ := strikes(rate, 8, 0.5, 1e-4)
	left, right := x, scaled(delayed(x, 38), 0.85)
	r, err := Measure(source(rate, left, right, silence(rate, 8)),
		source(rate, delayed(left, 5), delayed(right, -7), silence(rate, 8)), Options{})
	if err != nil {
		t.Fatal(err)
	}
	if len(r.Channels) != 3 || r.Frames != 8*rate || r.Rate != rate || len(r.Strongest) != 0 {
		t.Fatalf("%+v", r)
	}
	within(t, "left", r.Channels[0].Shift.Median*rate, 5, 1e-4)
	within(t, "right", r.Channels[1].Shift.Median*rate, -7, 1e-4)
	if c := r.Channels[2]; c.Channel != 3 || c.Onsets+c.Unclear != 0 {
		t.Errorf("silent channel: %+v", c)
	}
	if a, b := r.Channels[0], r.Channels[1]; a.Onsets != b.Onsets || a.Onsets < 12 {
		t.Errorf("%d and %d onsets", a.Onsets, b.Onsets)
	}
}

// odd gives frames in uneven portions, and then perhaps an error.
type odd struct {
	audio.Source
	calls int
	err   error
	after int
}

func (o *odd) ReadFrames(dst []float64) (int, error) {
	o.calls++
	if o.err != nil && o.calls > o.after {
		return 0, o.err
	}
	channels := o.Format().NumChannels
	return o.Source.ReadFrames(dst[:min(len(dst), (1+o.calls*37%500)*channels)])
}

func TestPortionsDoNotMatter(t *testing.T) {
	x, _ := strikes(16000, 10, 0.3, 1e-4)
	y := delayed(x, 3)
	want, err := Measure(source(16000, x, y), source(16000, y, x), Options{Strongest: 100})
	if err != nil {
		t.Fatal(err)
	}
	got, err := Measure(&odd{Source: source(16000, x, y)}, &odd{Source: source(16000, y, x), calls: 11}, Options{Strongest: 100})
	if err != nil {
		t.Fatal(err)
	}
	if a, b := fmt.Sprintf("%+v", want.Strongest), fmt.Sprintf("%+v", got.Strongest); a != b || len(want.Strongest) < 30 {
		t.Errorf("%d onsets, then %d that differ", len(want.Strongest), len(got.Strongest))
	}
}

// Several processed recordings at once are each what it is by itself.
func TestMeasureEach(t *testing.T) {
	x, _ := strikes(16000, 10, 0.3, 1e-4)
	made := [][]float64{delayed(x, 3), x, silence(16000, 10), scaled(delayed(x, -20), 0.5)}
	var all []audio.Source
	for _, y := range made {
		all = append(all, source(16000, y))
	}
	o := Options{Strongest: 5, Apart: 0.1}
	got, err := MeasureEach(source(16000, x), all, o)
	if err != nil || len(got) != len(made) {
		t.Fatal(len(got), err)
	}
	for i, y := range made {
		want, err := Measure(source(16000, x), source(16000, y), o)
		if err != nil {
			t.Fatal(err)
		}
		if diff := cmp.Diff(want, got[i], cmpopts.EquateNaNs()); diff != "" {
			t.Errorf("recording %d: %s", i, diff)
		}
	}
	if got[2].Channels[0].Lost < 20 || got[0].Channels[0].Lost > 0 {
		t.Errorf("%d onsets lost in silence, %d in a copy", got[2].Channels[0].Lost, got[0].Channels[0].Lost)
	}
}

func TestMeasureErrors(t *testing.T) {
	x := silence(16000, 1)
	broken := errors.New("the disk is gone")
	for name, c := range map[string]struct {
		original, processed audio.Source
		says                string
	}{
		"rates":     {source(16000, x), source(8000, x), "1 at 8000 Hz"},
		"channels":  {source(16000, x), source(16000, x, x), "recording 2 at"},
		"longer":    {source(16000, x), source(16000, x[1:]), "the original is longer than the processed recording"},
		"shorter":   {source(16000, x[1:]), source(16000, x), "the processed recording is longer than the original"},
		"rate":      {source(2000, x), source(2000, x), "at least 4000 Hz"},
		"original":  {&odd{Source: source(16000, x), err: broken, after: 3}, source(16000, x), "reading the original: the disk is gone"},
		"processed": {source(16000, x), &odd{Source: source(16000, x), err: broken, after: 3}, "reading the processed recording: the disk is gone"},
	} {
		r, err := Measure(c.original, c.processed, Options{})
		if err == nil || r != nil || !strings.Contains(err.Error(), c.says) {
			t.Errorf("%s: %v; want %q", name, err, c.says)
		}
		if strings.Contains(c.says, "the disk") && !errors.Is(err, broken) {
			t.Errorf("%s: %v does not wrap its cause", name, err)
		}
	}
	if _, err := Strongest(source(2000, x), 3, 1); err == nil {
		t.Error("Strongest at 2000 Hz: no error")
	}
	empty := func() audio.Source { return source(16000, nil) }
	if r, err := Measure(empty(), empty(), Options{Strongest: 3}); err != nil || r.Frames != 0 || len(r.Channels) != 1 {
		t.Errorf("nothing at all: %+v, %v", r, err)
	}
}

// endless is a long recording that is never in memory.
type endless struct {
	frames, at int64
	rate       int
	check      func()
}

func (e *endless) Format() *goaudio.Format {
	return &goaudio.Format{SampleRate: e.rate, NumChannels: 1}
}
func (e *endless) Frames() int64 { return e.frames }
func (e *endless) ReadFrames(dst []float64) (int, error) {
	if e.at == e.frames {
		return 0, io.EOF
	}
	n := int(min(int64(len(dst)), e.frames-e.at))
	for i := range dst[:n] {
		at := (e.at + int64(i)) % int64(e.rate/4) // four clicks a second
		dst[i] = 0
		if at == 100 {
			dst[i] = 0.5
		}
	}
	e.at += int64(n)
	e.check()
	return n, nil
}

// Twenty minutes take no more memory than a minute.
func TestMemoryIsBounded(t *testing.T) {
	const rate = 8000
	held := func(minutes int64) (samples int) {
		e := &endless{frames: minutes * 60 * rate, rate: rate, check: func() {}}
		strongest := newRanking(8, 0.5, 1)
		tracks, frames, err := follow(e, []audio.Source{&endless{frames: e.frames, rate: rate, check: func() {}}}, func(_ int, o Onset) { strongest.add(o) })
		if err != nil || frames != e.frames {
			t.Fatal(frames, err)
		}
		if want := int(4*60*minutes) - 1; tracks[0].onsets < want {
			t.Errorf("%d onsets, want %d", tracks[0].onsets, want)
		}
		tr := tracks[0]
		p := tr.outcomes[0]
		return cap(tr.original.x) + cap(p.processed.x) + 3*cap(tr.x.power) + 3*cap(p.y.power) +
			cap(tr.detections) + 16*cap(strongest.onsets)
	}
	minute, twenty := held(1), held(20)
	t.Logf("%d values after a minute, %d after twenty", minute, twenty)
	if minute > 10*rate || twenty > minute+2000*16 {
		t.Errorf("%d values are held after a minute, %d after twenty", minute, twenty)
	}
}
