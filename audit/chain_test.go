package audit

import (
	"fmt"
	"math"
	"testing"

	"fettle/filter"
	"fettle/filter/stream/machine"
)

func audited(t testing.TB, text string, rate int, as filter.Realisation) *Result {
	t.Helper()
	return auditedPaths(t, text, rate, as)[0]
}

func auditedPaths(t testing.TB, text string, rate int, as filter.Realisation) []*Result {
	t.Helper()
	c, err := filter.Parse([]byte(text), "chain.yaml")
	if err != nil {
		t.Fatal(err)
	}
	f, err := c.Realise(rate, as)
	if err != nil {
		t.Fatal(err)
	}
	results, err := Chain(f, machine.Best())
	if err != nil {
		t.Fatal(err)
	}
	return results
}

// within checks a figure against a reference to a relative tolerance.
func within(t *testing.T, what string, got, want, relative float64) {
	t.Helper()
	if !(math.Abs(got-want) <= relative*math.Abs(want)) {
		t.Errorf("%s: %.5g, want %.5g within %g %%", what, got, want, 100*relative)
	} else {
		t.Logf("%s: %.5g (reference %.5g)", what, got, want)
	}
}

const rumble = "stages: [{highpass: {at: 70 Hz, order: 4}}]"

// The values that an independent trial of the definitions gave at 48 kHz, on
// 2^19 points, to 2 %: here of realised kernels, through the path that renders.
func TestReferenceHighpass(t *testing.T) {
	lin := audited(t, rumble, 48000, filter.Linear)
	low := audited(t, rumble, 48000, filter.Minimum)
	iir := audited(t, rumble, 48000, filter.IIR)
	within(t, "linear pre-ring ms", 1e3*lin.Figures.PreRing.White.Length, 14.1, 0.02)
	within(t, "linear post-ring ms", 1e3*lin.Figures.PostRing.White.Length, 14.1, 0.02)
	within(t, "linear pink smear ms", 1e3*lin.Figures.Pink.Total, 1.12, 0.02)
	within(t, "linear beyond 5 ms, white dB", lin.Figures.PreRing.White.Beyond[1], -42.1, 0.02)
	within(t, "linear beyond 5 ms, pink dB", lin.Figures.PreRing.Pink.Beyond[1], -26.8, 0.02)
	for _, r := range []*Result{low, iir} {
		within(t, string(r.Phase)+" post-ring ms", 1e3*r.Figures.PostRing.White.Length, 26.8, 0.02)
		within(t, string(r.Phase)+" pink smear ms", 1e3*r.Figures.Pink.Total, 2.05, 0.02)
		if r.Figures.PreRing.White.Length != 0 {
			t.Errorf("%s rings %g s before its time", r.Phase, r.Figures.PreRing.White.Length)
		}
	}
	// The trial said 0.35 and, to judge by its other latencies, worked in steps
	// of 0.05; scipy 1.10.1 on the same definition gives 0.3736.
	if got := iir.Latency.Exact; !(math.Abs(got-0.3736) <= 1e-4) {
		t.Errorf("bulk latency %.5f samples, want 0.3736", got)
	}
}

func TestReferenceBandpassLatency(t *testing.T) {
	for order, want := range map[int]float64{2: 6.25, 4: 12.35, 6: 17.6, 8: 22.6} {
		r := audited(t, fmt.Sprintf("stages: [{bandpass: {at: [300 Hz, 3400 Hz], order: %d}}]", order), 48000, filter.IIR)
		within(t, fmt.Sprintf("order %d bulk latency", order), r.Latency.Exact, want, 0.02)
	}
}

// Chains of all sorts for properties that hold for all.
var sorts = []string{
	rumble,
	"stages: [{bandpass: {at: [300 Hz, 3400 Hz], order: 4}}]",
	"stages: [{notch: {at: 50 Hz, width: 12 Hz}}, {bell: {at: 2 kHz, gain: 5 dB, q: 3}}]",
	"stages: [{lowpass: {pass: 6 kHz, stop: 7 kHz, reject: 70 dB, family: kaiser}}, {highshelf: {at: 3 kHz, gain: -3 dB}}]",
	"stages: [{dc: {at: 20 Hz}}, {lowpass: {at: 4 kHz, order: 5}}, {delay: {by: 3 ms}}]",
}

// A symmetric kernel: every carried band's arrival is 0 within a microsecond,
// the phase share of smear is below 1e-9 of the whole (as variances), and the
// energy before equals the energy after.
func TestLinearPhaseHasNoPhase(t *testing.T) {
	for _, text := range sorts {
		f := audited(t, text, 16000, filter.Linear).Figures
		for _, b := range f.Bands {
			if b.Carried && !(math.Abs(b.Arrival) <= 1e-6) {
				t.Errorf("%s: the %g Hz band arrives at %g s", text, b.Nominal, b.Arrival)
			}
		}
		for _, s := range []struct{ phase, total float64 }{{f.Pink.Phase, f.Pink.Total}, {f.White.Phase, f.White.Total}} {
			if share := s.phase * s.phase / (s.total * s.total); !(share < 1e-9) {
				t.Errorf("%s: phase share of smear %g, allowed 1e-9", text, share)
			}
		}
		for name, d := range map[string]float64{
			"level": f.PreRing.White.Level - f.PostRing.White.Level, "pink level": f.PreRing.Pink.Level - f.PostRing.Pink.Level,
			"beyond 2 ms": f.PreRing.White.Beyond[0] - f.PostRing.White.Beyond[0],
			"length":      f.PreRing.White.Length - f.PostRing.White.Length, "pink length": f.PreRing.Pink.Length - f.PostRing.Pink.Length,
		} {
			if !(math.Abs(d) <= 1e-6) {
				t.Errorf("%s: %s before and after differ by %g", text, name, d)
			}
		}
		if f.Polarity != 1 || !(f.PhaseDeviation <= 1e-3) {
			t.Errorf("%s: polarity %d, phase deviation %g degrees", text, f.Polarity, f.PhaseDeviation)
		}
	}
}

// The minimum-phase twin has less early energy and the same magnitude. Early
// is what comes more than 1 ms before the peak.
func TestMinimumPhaseRingsLessAhead(t *testing.T) {
	for _, text := range sorts[:3] {
		lin := audited(t, text, 48000, filter.Linear)
		low := audited(t, text, 48000, filter.Minimum)
		if a, b := low.Figures.PreRing.White.Beyond[0], lin.Figures.PreRing.White.Beyond[0]; !(a < b) {
			t.Errorf("%s: %g dB ahead with minimum phase, %g with linear", text, a, b)
		}
		for _, r := range []*Result{lin, low} {
			if !(r.TargetErrorDB <= 0.15) {
				t.Errorf("%s %s: %g dB off target", text, r.Phase, r.TargetErrorDB)
			}
		}
		if text == sorts[2] {
			continue // inside the width of a notch deeper is free, so its bands may differ
		}
		for i, b := range lin.Figures.Bands {
			// Both are within 0.15 dB of one target.
			if d := b.Gain - low.Figures.Bands[i].Gain; b.Carried && !(math.Abs(d) <= 0.3) {
				t.Errorf("%s: gains at %g Hz differ by %g dB", text, b.Nominal, d)
			}
		}
	}
}

// Three roads, one answer: impulse and chirp through the rendering path and
// the coefficients' own formulas agree within a microsecond in every carried
// band, for every realisation, and so does the curve's group delay.
func TestRoadsAgree(t *testing.T) {
	for _, text := range sorts {
		for as, rate := range map[filter.Realisation]int{filter.Linear: 48000, filter.Minimum: 16000, filter.IIR: 16000, filter.Given: 44100} {
			r := audited(t, text, rate, as)
			if !(r.Disagreement <= 1e-6) || !(r.AnalyticDisagreement <= 1e-6) {
				t.Errorf("%s %s at %d Hz: impulse and chirp %g s apart, impulse and formula %g s, allowed 1e-6", text, as, rate, r.Disagreement, r.AnalyticDisagreement)
			}
		}
	}
}

// The IIR's measured group delay is the analytic one of its sections:
// tau(w) of a first-order all-pass c = (t-1)/(t+1), t = tan(pi f/fs), is
// (1 - c^2)/(1 + 2 c cos w + c^2) samples (Oppenheim and Schafer, all-pass systems).
func TestGroupDelayIsAnalytic(t *testing.T) {
	r := audited(t, "stages: [{allpass: {at: 1 kHz}}]", 48000, filter.IIR)
	tan := math.Tan(math.Pi * 1000 / 48000)
	c := (tan - 1) / (tan + 1)
	for i, hz := range r.Figures.Curve.Hz {
		w := 2 * math.Pi * hz / 48000
		want := (1 - c*c) / (1 + 2*c*math.Cos(w) + c*c) / 48000
		if got := r.Figures.Curve.GroupDelay[i]; !(math.Abs(got-want) <= 1e-10) {
			t.Errorf("at %g Hz: %g s, want %g", hz, got, want)
		}
	}
}

// The identity shows nothing anywhere, and so does a plain delay.
func TestIdentityShowsNothing(t *testing.T) {
	for _, text := range []string{"stages: []", "stages: [{delay: {by: 300 samples}}]", "stages: [{gain: {by: -6 dB}}]"} {
		r := audited(t, text, 48000, filter.Written)
		f := r.Figures
		for name, v := range map[string]float64{
			"latency": r.Latency.Exact, "smear": f.Pink.Total, "white smear": f.White.Total, "d90": f.D90, "d999": f.D999,
			"delay spread": f.DelaySpread, "phase deviation": f.PhaseDeviation, "lead": f.Lead, "sum test": sumTestOf(text, f.SumTest),
			"pre-ring length": f.PreRing.White.Length, "post-ring length": f.PostRing.White.Length,
			"pink pre-ring length": f.PreRing.Pink.Length, "pink post-ring length": f.PostRing.Pink.Length,
			"target error": r.TargetErrorDB, "disagreement": r.Disagreement,
		} {
			if !(math.Abs(v) <= 1e-9) {
				t.Errorf("%s: %s is %g", text, name, v)
			}
		}
		for _, level := range []float64{f.PreRing.White.Level, f.PreRing.Pink.Level, f.PostRing.White.Level, f.PostRing.Pink.Level} {
			if level != -200 {
				t.Errorf("%s: rings at %g dB", text, level)
			}
		}
	}
}

// sumTestOf leaves out the sum of a recording with its own delayed copy, which
// cancels by intent.
func sumTestOf(text string, loss float64) float64 {
	if text == "stages: [{delay: {by: 300 samples}}]" {
		return 0
	}
	return loss
}

// A stage on one channel gives each way of treatment a result of its own.
func TestChannelsAreAuditedApart(t *testing.T) {
	results := auditedPaths(t, "phase: linear\nstages: [{highpass: {at: 200 Hz, order: 2, channels: [2]}}]", 16000, filter.Written)
	if len(results) != 2 || results[0].Channel != 2 || results[1].Channel != 0 {
		t.Fatalf("%d results", len(results))
	}
	if results[0].Figures.Pink.Total == 0 || results[1].Figures.Pink.Total != 0 {
		t.Errorf("smear %g on channel 2, %g elsewhere", results[0].Figures.Pink.Total, results[1].Figures.Pink.Total)
	}
	if results[0].Latency.Removed != results[1].Latency.Removed {
		t.Errorf("removed %g on channel 2, %g elsewhere", results[0].Latency.Removed, results[1].Latency.Removed)
	}
}

// A narrow bell on a narrow band-pass must not decide which bands are carried.
func TestToneDoesNotDecideCarriage(t *testing.T) {
	plain := audited(t, "stages: [{bandpass: {at: [300 Hz, 3400 Hz], order: 2}}]", 16000, filter.IIR)
	loud := audited(t, "stages: [{bandpass: {at: [300 Hz, 3400 Hz], order: 2}}, {bell: {at: 1 kHz, gain: 24 dB, q: 4}}, {gain: {by: -40 dB}}]", 16000, filter.IIR)
	for i, b := range plain.Figures.Bands {
		if b.Carried != loud.Figures.Bands[i].Carried {
			t.Errorf("%g Hz: carried %v without the bell, %v with it", b.Nominal, b.Carried, loud.Figures.Bands[i].Carried)
		}
	}
}

func BenchmarkAudit16k(b *testing.B) {
	const text = "phase: linear\nstages: [{highpass: {at: 18 Hz, order: 4}}]"
	c, err := filter.Parse([]byte(text), "chain.yaml")
	if err != nil {
		b.Fatal(err)
	}
	f, err := c.Realise(48000, filter.Written)
	if err != nil {
		b.Fatal(err)
	}
	b.ReportMetric(float64(len(f.Paths()[0].System.Taps)), "taps")
	for b.Loop() {
		if _, err := Chain(f, machine.Best()); err != nil {
			b.Fatal(err)
		}
	}
}
