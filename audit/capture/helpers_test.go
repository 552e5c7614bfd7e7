package capture

import (
	"math"
	"testing"

	"fettle/audio"
	"fettle/audit/figures"
	"fettle/audit/probe"
	"fettle/filter/response"

	goaudio "github.com/go-audio/audio"
)

func within(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if diff := math.Abs(got - want); !(diff <= tol) {
		t.Errorf("%s: got %.8g, want %.8g, off by %.3g, allowed %.3g", what, got, want, diff, tol)
	}
}

// chirps is a probe of three chirps.
func chirps(t testing.TB, rate int, seconds, pause float64) probe.Parameters {
	t.Helper()
	r := probe.Defaults(probe.Chirp, rate)
	r.Seconds, r.Pause = seconds, pause
	return planned(t, r)
}

func planned(t testing.TB, r probe.Request) probe.Parameters {
	t.Helper()
	p, err := r.Plan()
	if err != nil {
		t.Fatal(err)
	}
	return p
}

// source is captured planes as a stream.
func source(rate int, planes ...[]float64) audio.Source {
	x := make([]float64, len(planes)*len(planes[0]))
	for c, p := range planes {
		for n, v := range p {
			x[n*len(planes)+c] = v
		}
	}
	return audio.FromFrames(&goaudio.Format{SampleRate: rate, NumChannels: len(planes)}, x)
}

func measured(t testing.TB, p probe.Parameters, planes ...[]float64) *Report {
	t.Helper()
	r, err := Measure(p, source(p.Rate, planes...))
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// only is the one channel of a report.
func only(t testing.TB, r *Report) *Result {
	t.Helper()
	if len(r.Channels) != 1 || r.Channels[0].Absent != "" {
		t.Fatalf("%d channels, the first absent %q", len(r.Channels), r.Channels[0].Absent)
	}
	return r.Channels[0]
}

// lowpass and highpass are of second order, Q 1/√2, by the bilinear transform.
func lowpass(f, rate float64) response.Section {
	k := math.Tan(math.Pi * f / rate)
	n := 1 / (1 + k*math.Sqrt2 + k*k)
	return response.Section{B0: k * k * n, B1: 2 * k * k * n, B2: k * k * n, A1: 2 * (k*k - 1) * n, A2: (1 - k*math.Sqrt2 + k*k) * n}
}

func highpass(f, rate float64) response.Section {
	k := math.Tan(math.Pi * f / rate)
	n := 1 / (1 + k*math.Sqrt2 + k*k)
	return response.Section{B0: n, B1: -2 * n, B2: n, A1: 2 * (k*k - 1) * n, A2: (1 - k*math.Sqrt2 + k*k) * n}
}

// allpass is of second order.
func allpass(f, q, rate float64) response.Section {
	w := 2 * math.Pi * f / rate
	alpha := math.Sin(w) / (2 * q)
	a0 := 1 + alpha
	b := (1 - alpha) / a0
	return response.Section{B0: b, B1: -2 * math.Cos(w) / a0, B2: 1, A1: -2 * math.Cos(w) / a0, A2: b}
}

// truth is what sections do, by their own impulse response.
func truth(sections []response.Section, rate float64, seconds float64) *figures.Figures {
	return figures.Measure(figures.Response{H: response.Impulse(sections, int(seconds*rate)), Rate: rate})
}

// noiseUnder is a noise's RMS so many dB under a chirp of the probe's amplitude.
func noiseUnder(p probe.Parameters, down float64) float64 {
	return p.Amplitude() / math.Sqrt2 * math.Pow(10, -down/20)
}
