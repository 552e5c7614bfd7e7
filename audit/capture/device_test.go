package capture

import (
	"math"
	"os"
	"strconv"
	"testing"

	"fettle/audit/figures"
	"fettle/audit/probe"
	"fettle/filter/response"
)

// A device that does nothing has a response of one sample: nothing shows before or after
// it, not even the chirp's own band edges. -120 dB is what the measurement is to be free
// to; -140 is allowed for rings of band edges that are continued to 4 rounds' accuracy.
func TestIdentityShowsNothing(t *testing.T) {
	t.Parallel()
	p := chirps(t, 48000, 2, 1)
	y := device{offset: 1234, gain: 2, tail: 24000}.record(p, 1)
	r := measured(t, p, y)
	c := only(t, r)
	f := c.Figures
	within(t, "latency", c.Latency, 1234, 1e-9)
	within(t, "drift, ppm", r.Drift.PPM, 0, 1e-9)
	within(t, "white smear, s", f.White.Total, 0, 1e-9)
	within(t, "pink smear, s", f.Pink.Total, 0, 1e-9)
	within(t, "delay spread, s", f.DelaySpread, 0, 1e-9)
	within(t, "phase deviation", f.PhaseDeviation, 0, 1e-5)
	within(t, "D99.9", f.D999, 0, 0)
	if f.Polarity != 1 {
		t.Errorf("polarity %d, want 1", f.Polarity)
	}
	for name, ring := range map[string]figures.RingColumn{
		"white pre-ring": f.PreRing.White, "pink pre-ring": f.PreRing.Pink, "white post-ring": f.PostRing.White, "pink post-ring": f.PostRing.Pink,
	} {
		for _, level := range []float64{ring.Level, ring.Beyond[0], ring.Beyond[1], ring.Beyond[2]} {
			if !(level < -140) {
				t.Errorf("%s: %.1f dB, want under -140", name, level)
			}
		}
		within(t, name+" length", ring.Length, 0, 0)
	}
	for i, b := range f.Bands {
		within(t, "gain", b.Gain, 20*math.Log10(2), 1e-6)
		within(t, "arrival", b.Arrival, 0, 1e-9)
		if !b.Carried {
			t.Errorf("band %g Hz is not carried", b.Nominal)
		}
		within(t, "interval", c.Errors.Bands[i].Arrival, 0, 1e-9)
	}
	for _, q := range c.Products {
		if !(q.Level < -100) {
			t.Errorf("product of order %d at %.1f dB, there is no distortion", q.Order, q.Level)
		}
	}
	if len(r.Warnings)+len(c.Warnings) > 0 {
		t.Errorf("warnings %v %v", r.Warnings, c.Warnings)
	}
}

// Filters without noise, against figures of their own impulse responses. What the probe does
// not cover is a guess; the intervals say how good.
func TestCleanFilters(t *testing.T) {
	t.Parallel()
	const rate = 16000
	for name, sections := range map[string][]response.Section{
		"band-pass": {highpass(60, rate), lowpass(3000, rate)},
		"all-pass":  {allpass(300, 1, rate), allpass(2000, 0.7, rate)},
	} {
		want := truth(sections, rate, 1)
		p := chirps(t, rate, 4, 1)
		c := only(t, measured(t, p, device{offset: 100, gain: -0.25, sections: sections, tail: rate}.record(p, 1)))
		f, e := c.Figures, c.Errors
		within(t, name+" latency", c.Latency, 100+want.Latency, 1e-4)
		for i, b := range want.Bands {
			within(t, name+" arrival", f.Bands[i].Arrival, b.Arrival, 1e-7+3*e.Bands[i].Arrival)
			within(t, name+" spread", f.Bands[i].Spread, b.Spread, 1e-7+3*e.Bands[i].Spread)
			within(t, name+" gain", f.Bands[i].Gain, b.Gain+20*math.Log10(0.25), 1e-4)
		}
		within(t, name+" white smear", f.White.Total, want.White.Total, 1e-3*want.White.Total)
		within(t, name+" pink smear", f.Pink.Total, want.Pink.Total, 1e-3*want.Pink.Total)
		within(t, name+" post-ring", f.PostRing.White.Beyond[0], want.PostRing.White.Beyond[0], 0.05)
		within(t, name+" post-ring length", f.PostRing.White.Length, want.PostRing.White.Length, 2.0/rate)
		within(t, name+" D99.9", f.D999, want.D999, 1.0/rate)
		for i, hz := range want.Curve.Hz {
			if hz > 20 && hz < 0.45*rate && !math.IsNaN(want.Curve.GroupDelay[i]) {
				within(t, name+" group delay", f.Curve.GroupDelay[i], want.Curve.GroupDelay[i]+100.0/rate, 1e-6+3*e.Curve.GroupDelay[i])
			}
		}
	}
}

// Filters with corners near the probe's ends, without noise: what the continuation beyond them
// is wrong by, the intervals of arrivals and gains hold. A root may stand beside its interval by
// chance, where the continuation is wrong and differs by little: a spread by 0.1 microsecond or
// four times its interval, a smear by 0.05 %.
func TestContinuationIsDoubted(t *testing.T) {
	t.Parallel()
	const rate = rate4
	p := chirps(t, rate, 4, 1)
	for name, sections := range map[string][]response.Section{
		"high-pass at 40 Hz":    {highpass(40, rate), highpass(40, rate)},
		"high-pass at 20 Hz":    {highpass(20, rate)},
		"high-pass at 15 Hz":    {highpass(15, rate), highpass(15, rate)},
		"low-pass at 0.45 rate": {lowpass(0.45*rate, rate)},
	} {
		want := truth(sections, rate, 2)
		c := only(t, measured(t, p, device{offset: 100, gain: 1, sections: sections, tail: rate}.record(p, 1)))
		f, e := c.Figures, c.Errors
		for i, b := range want.Bands {
			within(t, name+" arrival", f.Bands[i].Arrival, b.Arrival, 1e-9+e.Bands[i].Arrival)
			within(t, name+" spread", f.Bands[i].Spread, b.Spread, 1e-7+4*e.Bands[i].Spread)
			within(t, name+" gain", f.Bands[i].Gain, b.Gain, 1e-5+e.Bands[i].Gain)
		}
		within(t, name+" pink smear", f.Pink.Total, want.Pink.Total, 5e-4*want.Pink.Total+e.Pink.Total)
		within(t, name+" its magnitude share", f.Pink.Magnitude, want.Pink.Magnitude, 5e-4*want.Pink.Magnitude+e.Pink.Magnitude)
		within(t, name+" its phase share", f.Pink.Phase, want.Pink.Phase, 5e-4*want.Pink.Phase+e.Pink.Phase)
	}
}

// The device of the project's brief: delay, filter, noise 40 dB down, distortion of second and
// third order, 30 ppm drift, inverted polarity, 16 bits, three repeats of 5 s. The latency
// holds at the first sample of the first repeat, at frame Lead of the probe, which the
// recording clock has stretched by then.
func TestSimulatedDevice(t *testing.T) {
	t.Parallel()
	p := chirps(t, 48000, 5, 1)
	sections := []response.Section{highpass(40, 48000), lowpass(12000, 48000)}
	d := device{offset: 4801.37, gain: -0.5, ppm: 30, square: 0.02, cube: 0.05, sections: sections,
		noise: 0.5 * noiseUnder(p, 40), bits: 16, tail: 48000}
	r := measured(t, p, d.record(p, 1))
	c := only(t, r)
	want := truth(sections, 48000, 1)
	latency := d.offset + float64(p.Lead)*30e-6 + want.Latency
	t.Logf("drift %.5f ± %.5f ppm; latency %.5f ± %.5f, true %.5f", r.Drift.PPM, r.Drift.Err, c.Latency, c.LatencyErr, latency)
	within(t, "drift, ppm", r.Drift.PPM, 30, 0.5)
	within(t, "latency", c.Latency, latency, 0.02)
	if c.Figures.Polarity != -1 {
		t.Errorf("polarity %d, want -1", c.Figures.Polarity)
	}
	if len(r.Warnings)+len(c.Warnings) > 0 {
		t.Errorf("warnings %v %v", r.Warnings, c.Warnings)
	}
	for i, b := range want.Bands {
		// At two degrees of freedom six half widths hold 99.85 %.
		within(t, "arrival", c.Figures.Bands[i].Arrival, b.Arrival, 6*c.Errors.Bands[i].Arrival)
	}
	// The noise that was added is 43 dB under the probe's peak of -20 - 6 dBFS: in a band, its share.
	for _, n := range c.Noise {
		expected := 20*math.Log10(d.noise) + 10*math.Log10((n.Upper-n.Lower)/24000)
		within(t, "noise", n.Level, expected, 1.5)
	}
}

// Over many noises the intervals hold the truth: pooled over bands, 92 to 99 % (the bands of one
// trial share its noise, so the spread of the share is about that of a binomial over
// a third of them). FETTLE_TRIALS and FETTLE_RATE ask for other trials than these; at 48 kHz one
// takes seconds.
func TestIntervalsHoldTheTruth(t *testing.T) {
	t.Parallel()
	trials, rate := asked("FETTLE_TRIALS", 32), asked("FETTLE_RATE", 1000)
	p := chirps(t, rate, 2, 0.6)
	if rate > 1000 {
		p = chirps(t, rate, 5, 1)
	}
	sections := []response.Section{highpass(30, float64(rate)), lowpass(0.2*float64(rate), float64(rate))}
	want := truth(sections, float64(rate), 4)
	held := map[string][2]int{}
	check := func(what string, got, half, true float64) {
		n := held[what]
		if !math.IsNaN(got) {
			n[1]++
			if math.Abs(got-true) <= half {
				n[0]++
			}
		}
		held[what] = n
	}
	for i := range trials {
		d := device{offset: 300 + float64(i%10)*0.13, gain: -0.5, ppm: 30, square: 0.02, cube: 0.05, sections: sections,
			noise: 0.5 * noiseUnder(p, 40), bits: 16, tail: rate}
		r := measured(t, p, d.record(p, uint64(i)))
		c := only(t, r)
		check("drift", r.Drift.PPM, r.Drift.Err, 30)
		check("latency", c.Latency, c.LatencyErr, d.offset+float64(p.Lead)*30e-6+want.Latency)
		within(t, "latency", c.Latency, d.offset+float64(p.Lead)*30e-6+want.Latency, 0.02)
		within(t, "drift, ppm", r.Drift.PPM, 30, 0.5)
		// What a fundamental gains by the cubic term: 3/4·cube·A².
		gain := 20 * math.Log10(0.5*(1+0.75*d.cube*0.01))
		for j, b := range want.Bands {
			f, e := c.Figures.Bands[j], c.Errors.Bands[j]
			check("arrival", f.Arrival, e.Arrival, b.Arrival)
			check("gain", f.Gain, e.Gain, b.Gain+gain)
			check("spread", f.Spread, e.Spread, b.Spread)
			check("phase", f.PhaseDeviation, e.PhaseDeviation, b.PhaseDeviation)
		}
		f, e := c.Figures, c.Errors
		check("smear", f.White.Total, e.White.Total, want.White.Total)
		check("smear", f.White.Phase, e.White.Phase, want.White.Phase)
		check("smear", f.Pink.Total, e.Pink.Total, want.Pink.Total)
		check("smear", f.Pink.Magnitude, e.Pink.Magnitude, want.Pink.Magnitude)
	}
	for what, n := range held {
		share := float64(n[0]) / float64(n[1])
		t.Logf("%s: %d of %d, %.3f", what, n[0], n[1], share)
		least, most := 0.92, 0.99
		switch what {
		case "drift", "latency", "smear": // one or a few a trial: four deviations of a binomial
			least, most = 0.95-4*math.Sqrt(0.05*0.95/float64(trials)), 1
		case "spread": // a root whose interval takes the farther end
			most = 0.995
		}
		if !(share >= least && share <= most) || n[1] < trials {
			t.Errorf("%s: %d of %d intervals hold the truth, want %.2f to %.2f", what, n[0], n[1], least, most)
		}
	}
}

// asked is the whole number in the environment under a name, or another.
func asked(name string, otherwise int) int {
	if n, err := strconv.Atoi(os.Getenv(name)); err == nil {
		return n
	}
	return otherwise
}

// A polynomial makes harmonics of known size: of sin with amplitude A, x² gives A²/2 at twice the
// frequency, x³ gives A³/4 at three times and adds 3A³/4 to the fundamental. The chirp ends
// low, so that no product is beyond half the rate.
func TestProductsOfDistortion(t *testing.T) {
	t.Parallel()
	r := probe.Defaults(probe.Chirp, 16000)
	r.Seconds, r.Pause, r.To, r.Level = 4, 1, 2300, -6
	p := planned(t, r)
	const square, cube = 0.03, 0.05
	a := p.Amplitude()
	fundamental := 1 + 0.75*cube*a*a
	want := map[int]float64{
		2: 20 * math.Log10(square*a/2/fundamental),
		3: 20 * math.Log10(cube*a*a/4/fundamental),
	}
	for _, noise := range []float64{0, noiseUnder(p, 50)} {
		c := only(t, measured(t, p, device{offset: 50, gain: 1, square: square, cube: cube, noise: noise, tail: 16000}.record(p, 3)))
		for _, q := range c.Products {
			switch expected := want[q.Order]; {
			case expected != 0:
				// The tapers hold less than full amplitude: 0.2 dB.
				within(t, "level", q.Level, expected, 0.2+q.Err)
				within(t, "lead", q.Lead, p.OrderLead(float64(q.Order))/16000, 1e-12)
			case noise > 0 && q.Level > -78: // the noise in its window, about; one in forty is stated by chance
				t.Errorf("order %d, which there is none of, at %.1f ± %.1f dB in noise", q.Order, q.Level, q.Err)
			}
		}
		within(t, "gain", c.Figures.Bands[15].Gain, 20*math.Log10(fundamental), 2e-3+c.Errors.Bands[15].Gain)
		// Distortion does not leak into the linear response.
		if noise == 0 {
			within(t, "pre-ring length", c.Figures.PreRing.White.Length, 0, 0)
			within(t, "arrival", c.Figures.Bands[15].Arrival, 0, 1e-7)
		}
	}
}
