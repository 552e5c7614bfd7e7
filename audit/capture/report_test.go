package capture

import (
	"errors"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"fettle/audio"
	"fettle/audit/figures"
	"fettle/audit/probe"
	"fettle/filter/response"
)

const rate4 = 4000

// Noise adds to smear and to rings; what is stated must be free of it, and what noise
// decides must not be stated.
func TestNoiseIsSubtractedOrSwamps(t *testing.T) {
	t.Parallel()
	p := chirps(t, rate4, 3, 1)
	sections := []response.Section{highpass(100, rate4)}
	want := truth(sections, rate4, 1)
	quiet := device{offset: 200, gain: 1, sections: sections, noise: noiseUnder(p, 60), tail: rate4}
	c := only(t, measured(t, p, quiet.record(p, 5)))
	f, e := c.Figures, c.Errors
	within(t, "white smear", f.White.Total, want.White.Total, 6*e.White.Total)
	within(t, "pink smear", f.Pink.Total, want.Pink.Total, 6*e.Pink.Total)
	within(t, "D90", f.D90, want.D90, e.D90)
	within(t, "D99.9", f.D999, want.D999, e.D999+1.0/rate4)
	within(t, "post-ring beyond 2 ms", f.PostRing.White.Beyond[0], want.PostRing.White.Beyond[0], e.PostRing.White.Beyond[0]+0.01)
	if why := f.NotStated["pre_ring.white_db"]; !math.IsNaN(f.PreRing.White.Level) || !strings.Contains(why, "hides") {
		t.Errorf("pre-ring of a causal filter in noise: %g dB, reason %q; want it not stated", f.PreRing.White.Level, why)
	}

	loud := quiet
	loud.noise = noiseUnder(p, 0)
	c = only(t, measured(t, p, loud.record(p, 5)))
	for name, v := range map[string]float64{
		"d90": c.Figures.D90, "d999_ms": c.Figures.D999, "pre_ring.white_ms": c.Figures.PreRing.White.Length,
		"post_ring.white_ms": c.Figures.PostRing.White.Length, "lead_ms": c.Figures.Lead,
		"pre_ring.beyond_db[5]": c.Figures.PreRing.White.Beyond[1],
	} {
		if name != "d90" && (!math.IsNaN(v) || c.Figures.NotStated[name] == "") {
			t.Errorf("%s with the noise as loud as the chirp: %g, reason %q; want it not stated", name, v, c.Figures.NotStated[name])
		}
	}
	// And yet arrivals stand in their intervals.
	for i, b := range want.Bands {
		if got := c.Figures.Bands[i]; got.Carried {
			within(t, "arrival", got.Arrival, b.Arrival, 6*c.Errors.Bands[i].Arrival)
		}
	}
}

// One repeat says when and how loud, but neither drift nor how sure it is.
func TestOneRepeat(t *testing.T) {
	t.Parallel()
	q := probe.Defaults(probe.Chirp, rate4)
	q.Seconds, q.Pause, q.Repeats = 2, 1, 1
	p := planned(t, q)
	r := measured(t, p, device{offset: 321, gain: 1, noise: noiseUnder(p, 50), tail: 800}.record(p, 1))
	c := only(t, r)
	within(t, "latency", c.Latency, 321, 0.01)
	if !math.IsNaN(r.Drift.PPM) || !strings.Contains(r.Drift.NotStated, "dispersion") {
		t.Errorf("drift %g, reason %q", r.Drift.PPM, r.Drift.NotStated)
	}
	for _, e := range entries(c.Errors) {
		if !math.IsNaN(*e.at) {
			t.Fatalf("%s has an interval of %g from one repeat", e.key, *e.at)
		}
	}
	if !math.IsNaN(c.Figures.White.Total) || c.Figures.NotStated["smear.white.total_ms"] == "" {
		t.Errorf("smear %g of one repeat is stated", c.Figures.White.Total)
	}
	within(t, "gain at 1 kHz", c.Figures.Bands[17].Gain, 0, 0.05)
	// 50 dB under the chirp, in all bands together.
	var noise float64
	for _, n := range c.Noise {
		noise += math.Pow(10, n.Level/10)
	}
	covered := c.Noise[len(c.Noise)-1].Upper - c.Noise[0].Lower
	within(t, "noise", 10*math.Log10(noise), 20*math.Log10(noiseUnder(p, 50))+10*math.Log10(covered/(rate4/2)), 1.5)
}

// Two repeats give drift, without an interval.
func TestTwoRepeats(t *testing.T) {
	t.Parallel()
	q := probe.Defaults(probe.Chirp, rate4)
	q.Seconds, q.Pause, q.Repeats = 2, 1, 2
	p := planned(t, q)
	r := measured(t, p, device{offset: 321, gain: 1, ppm: -80, noise: noiseUnder(p, 50), tail: 800}.record(p, 1))
	within(t, "drift", r.Drift.PPM, -80, 0.5)
	if !math.IsNaN(r.Drift.Err) || r.Drift.NotStated == "" {
		t.Errorf("drift ± %g, reason %q; want no interval", r.Drift.Err, r.Drift.NotStated)
	}
}

// Any offset, also a cut-off start; leading noise and a click louder than the chirp; polarity.
func TestProbeIsFoundAnywhere(t *testing.T) {
	t.Parallel()
	p := chirps(t, rate4, 2, 1)
	r := rand.New(rand.NewPCG(4, 4))
	for _, offset := range []int{-1500, 0, 30 * rate4} {
		d := device{offset: float64(offset), gain: -0.01, tail: rate4}
		y := d.record(p, 1)
		for n := range y {
			noise := 1e-6
			if n < offset-rate4 {
				noise = 0.002 // louder than the chirp's RMS
			}
			y[n] += noise * r.NormFloat64()
		}
		if offset > 0 {
			y[offset/9] += 1
		}
		c := only(t, measured(t, p, y))
		within(t, "latency", c.Latency, float64(offset), 0.02)
		if c.Figures.Polarity != -1 {
			t.Errorf("offset %d: polarity %d, want -1", offset, c.Figures.Polarity)
		}
	}
}

func TestRefusals(t *testing.T) {
	t.Parallel()
	p := chirps(t, rate4, 2, 1)
	noise := make([]float64, 12*rate4)
	r := rand.New(rand.NewPCG(9, 9))
	for n := range noise {
		noise[n] = 0.1 * r.NormFloat64()
	}
	if _, err := Measure(p, source(rate4, noise)); !errors.Is(err, ErrNotFound) {
		t.Errorf("noise: %v, want ErrNotFound", err)
	}
	if _, err := Measure(p, source(rate4, make([]float64, rate4))); !errors.Is(err, ErrNotFound) {
		t.Errorf("silence: %v, want ErrNotFound", err)
	}
	if _, err := Measure(p, source(rate4, nil)); !errors.Is(err, ErrNotFound) {
		t.Errorf("an empty capture: %v, want ErrNotFound", err)
	}
	if _, err := Measure(p, source(16000, noise)); err == nil || !strings.Contains(err.Error(), "16000") {
		t.Errorf("another rate: %v", err)
	}
	y := device{offset: 100, gain: 1, ppm: 800, tail: rate4}.record(p, 1)
	if _, err := Measure(p, source(rate4, y)); err == nil || !strings.Contains(err.Error(), "ppm") {
		t.Errorf("800 ppm: %v, want a refusal that names them", err)
	}
	broken := p
	broken.Repeats = 0
	if _, err := Measure(broken, source(rate4, noise)); err == nil {
		t.Error("a probe of no repeats is measured")
	}
}

// A tone at the repeats' distance is everywhere, and no chirp.
func TestHumIsNoProbe(t *testing.T) {
	t.Parallel()
	p := chirps(t, rate4, 2, 1)
	hum := make([]float64, 12*rate4)
	for n := range hum {
		hum[n] = 0.3 * math.Sin(2*math.Pi*50*float64(n)/rate4)
	}
	if _, err := Measure(p, source(rate4, hum)); !errors.Is(err, ErrNotFound) {
		t.Errorf("hum: %v, want ErrNotFound", err)
	}
}

func TestWarnings(t *testing.T) {
	t.Parallel()
	p := chirps(t, rate4, 2, 1)
	plain := device{offset: 100, gain: 1, tail: rate4}
	clip := func(y []float64, at float64) []float64 {
		for n, v := range y {
			y[n] = max(-at, min(at, v))
		}
		return y
	}
	scaled := func(gain float64) []float64 {
		d := plain
		d.gain = gain
		return d.record(p, 1)
	}
	for _, c := range []struct {
		name, says string
		y          []float64
	}{
		{"clipped at full scale", "clipped", clip(scaled(12), 1)},
		{"clipped in the analogue", "clipped", clip(scaled(1), 0.09)},
		{"too low", "too low", device{offset: 100, gain: 1, noise: noiseUnder(p, -12), tail: rate4}.record(p, 1)},
		{"cut short", "only 2 of", plain.record(p, 1)[:p.Lead+2*p.Period+p.Signal/2]},
		{"rings too long", "longer pause", device{offset: 100, gain: 1, tail: rate4, sections: []response.Section{
			{B0: 0.01, A1: -2 * 0.9998 * math.Cos(0.3), A2: 0.9998 * 0.9998}}}.record(p, 1)},
	} {
		r := measured(t, p, c.y)
		all := strings.Join(append(r.Warnings, r.Channels[0].Warnings...), "; ")
		if !strings.Contains(all, c.says) {
			t.Errorf("%s: warnings %q, want one with %q", c.name, all, c.says)
		}
	}
	// 16 bits make low notes flat at the top for some samples: that is no clipping.
	quantised := device{offset: 100, gain: 0.01, bits: 16, tail: rate4}
	if c := only(t, measured(t, p, quantised.record(p, 1))); len(c.Warnings) > 0 {
		t.Errorf("a quiet capture in 16 bits: %v", c.Warnings)
	}
	// A clock that jumps by a sample between repeats is no even drift.
	y := plain.record(p, 1)
	cut := 100 + p.Lead + p.Period + p.Signal + 2000
	jumped := append(append([]float64(nil), y[:cut]...), y[cut+1:]...)
	if r := measured(t, p, jumped); !strings.Contains(strings.Join(r.Warnings, ";"), "unsteady") {
		t.Errorf("a lost sample: warnings %v", r.Warnings)
	}
}

// Each channel has its own result; the delay between them is known better than the
// latency, since drift is common to both. A dead channel is said to be one.
func TestChannels(t *testing.T) {
	t.Parallel()
	p := chirps(t, rate4, 2, 1)
	a := device{offset: 500, gain: 1, ppm: 20, noise: noiseUnder(p, 50), tail: rate4}
	b := a
	b.offset, b.gain = 512.4, -0.5
	dead := make([]float64, len(a.record(p, 1)))
	hiss := make([]float64, len(dead))
	r := rand.New(rand.NewPCG(8, 8))
	for n := range hiss {
		hiss[n] = 1e-3 * r.NormFloat64()
	}
	second := b.record(p, 2)[:len(dead)]
	report := measured(t, p, dead, a.record(p, 1), second, hiss)
	if report.Channels[0].Absent == "" || report.Channels[3].Absent == "" {
		t.Errorf("channels without the probe: %q, %q", report.Channels[0].Absent, report.Channels[3].Absent)
	}
	for _, c := range report.Channels {
		if len(c.Warnings) > 0 {
			t.Errorf("channel %d: %v", c.Channel, c.Warnings)
		}
	}
	first, behind := report.Channels[1], report.Channels[2]
	within(t, "latency", first.Latency, 500+float64(p.Lead)*20e-6, 0.02)
	within(t, "behind", behind.Behind, 12.4, 3*behind.BehindErr)
	if !(behind.BehindErr < 0.02) || first.Behind != 0 || !math.IsNaN(report.Channels[0].Behind) {
		t.Errorf("behind: %g, %g ± %g; dead %g", first.Behind, behind.Behind, behind.BehindErr, report.Channels[0].Behind)
	}
	if first.Figures.Polarity != 1 || behind.Figures.Polarity != -1 {
		t.Errorf("polarities %d, %d", first.Figures.Polarity, behind.Figures.Polarity)
	}
}

func TestSwappedAndAltered(t *testing.T) {
	t.Parallel()
	p := chirps(t, rate4, 1, 1)
	own := samplesOf(p)
	y := device{offset: 40, gain: 0.5}.record(p, 1)
	files := func(a, b []float64) (audio.Source, audio.Source) { return source(rate4, a), source(rate4, b) }
	a, b := files(own, y)
	if err := Check(p, a, b); err != nil {
		t.Errorf("the right way round: %v", err)
	}
	a, b = files(y, own)
	if err := Check(p, a, b); !errors.Is(err, ErrSwapped) {
		t.Errorf("swapped: %v, want ErrSwapped", err)
	}
	var altered *probe.AlteredError
	a, b = files(y, y)
	if err := Check(p, a, b); !errors.As(err, &altered) {
		t.Errorf("altered: %v, want AlteredError", err)
	}
	a, b = files(own, own) // a loop without any device is a capture like another
	if err := Check(p, a, b); err != nil {
		t.Errorf("a plain copy: %v", err)
	}
}

// Impulses with dither, through a path of 12 bits that has no dither of its own: in the mean
// the path is linear.
func TestDitheredImpulses(t *testing.T) {
	t.Parallel()
	q := probe.Defaults(probe.Impulse, rate4)
	q.Repeats, q.Dither, q.Level, q.Seconds = 64, 12, -3, 0.3
	p := planned(t, q)
	sections := []response.Section{highpass(200, rate4), lowpass(800, rate4)}
	want := truth(sections, rate4, 0.25)
	y := device{offset: 77, gain: 1, tail: rate4}.record(p, 1)
	step := math.Exp2(-11)
	for n, v := range y {
		y[n] = step * math.Round(v/step)
	}
	filtered := device{gain: 1, sections: sections}.pass(y)
	r := measured(t, p, filtered)
	c := only(t, r)
	within(t, "latency", c.Latency, 77+want.Latency, 0.02)
	within(t, "drift", r.Drift.PPM, 0, 3*r.Drift.Err+1e-9)
	stated := 0
	for i, b := range want.Bands {
		if got := c.Figures.Bands[i]; got.Carried {
			stated++
			within(t, "arrival", got.Arrival, b.Arrival, 2*c.Errors.Bands[i].Arrival)
			within(t, "gain", got.Gain, b.Gain, 2*c.Errors.Bands[i].Gain)
		}
	}
	if stated < 10 {
		t.Errorf("only %d bands are carried", stated)
	}
	if len(c.Products) != 0 {
		t.Errorf("impulses tell products of distortion apart: %v", c.Products)
	}
}

// Hum of the mains that runs on through the repeats is not taken for response.
func TestHumAveragesOut(t *testing.T) {
	t.Parallel()
	p := chirps(t, rate4, 2, 1)
	y := device{offset: 100, gain: 1, tail: rate4}.record(p, 1)
	for n := range y {
		y[n] += 0.01 * math.Sin(2*math.Pi*50*float64(n)/rate4)
	}
	c := only(t, measured(t, p, y))
	for i, b := range c.Figures.Bands {
		// The hum is 20 dB under the chirp and in one band; there the repeats disagree.
		within(t, "arrival", b.Arrival, 0, 1e-6+2*c.Errors.Bands[i].Arrival)
		within(t, "gain", b.Gain, 0, 0.001+2*c.Errors.Bands[i].Gain)
	}
	if hum, quiet := c.Noise[4].SNR, c.Noise[15].SNR; !(hum < quiet-30) {
		t.Errorf("signal to noise at 50 Hz %.0f dB, at 630 Hz %.0f; want far less at 50", hum, quiet)
	}
}

// The list of numbers is whole: a figure that is forgotten in it would go without noise
// taken out and without an interval.
func TestEntriesListEveryNumber(t *testing.T) {
	t.Parallel()
	f := figures.Measure(figures.Response{H: []float64{1, 0.5, 0.25}, Rate: rate4})
	listed := len(entries(f))
	const whole, rings, perBand, perPoint = 7 + 6, 4 * 6, 6, 3
	if want := whole + rings + perBand*len(f.Bands) + perPoint*len(f.Curve.Hz); listed != want {
		t.Errorf("%d numbers listed, %d expected", listed, want)
	}
	seen := map[*float64]bool{}
	for _, e := range entries(f) {
		if seen[e.at] {
			t.Errorf("%s is listed twice", e.key)
		}
		seen[e.at] = true
	}
}

func BenchmarkCapture60s(b *testing.B) {
	q := probe.Defaults(probe.Chirp, 48000)
	q.Seconds, q.Pause = 17, 2.8
	p := planned(b, q)
	d := device{offset: 1000.3, gain: 0.5, ppm: 20, sections: []response.Section{highpass(40, 48000)}, noise: 0.5 * noiseUnder(p, 60)}
	y := d.record(p, 1)
	b.ReportMetric(float64(len(y))/48000, "s-captured")
	for b.Loop() {
		measured(b, p, y)
	}
}
