package capture

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"fettle/audit/probe"
	"fettle/filter/response"

	"gonum.org/v1/gonum/dsp/fourier"
)

const rate16 = 16000

// A device that distorts at the sample rate itself: what folds over half the rate stands
// where a response may stand, and is named.
func TestFoldedHarmonicsAreNamed(t *testing.T) {
	t.Parallel()
	p := chirps(t, rate16, 5, 1)
	for says, d := range map[string]device{"order 2 folded": {square: 0.4}, "order 3 folded": {cube: 2}} {
		d.offset, d.gain, d.noise, d.tail = 100, 1, noiseUnder(p, 60), rate16
		c := only(t, measured(t, p, d.record(p, 1)))
		all := strings.Join(c.Warnings, "; ")
		if !strings.Contains(all, says) || strings.Contains(all, "longer pause") {
			t.Errorf("warnings %q, want %q and no advice about the pause", all, says)
		}
	}
}

// A probe that ends where nothing folds any more, as the warning asks, finds the truth: a
// response of one sample.
func TestNothingFoldsUnderAShorterProbe(t *testing.T) {
	t.Parallel()
	q := probe.Defaults(probe.Chirp, rate16)
	q.Seconds, q.Pause, q.To = 5, 1, 4000
	p := planned(t, q)
	d := device{offset: 100, gain: 1, square: 0.4, noise: noiseUnder(p, 60), tail: rate16}
	c := only(t, measured(t, p, d.record(p, 1)))
	if len(c.Warnings) > 0 {
		t.Errorf("warnings %q", c.Warnings)
	}
	for i, b := range c.Figures.Bands {
		if b.Carried && b.Nominal >= 100 {
			within(t, "arrival", b.Arrival, 0, 6*c.Errors.Bands[i].Arrival)
			within(t, "spread", b.Spread, 0, 2*c.Errors.Bands[i].Spread+1e-6)
		}
	}
}

// Neither a room that rings nor an echo is taken for one, and the echo stays response.
func TestRoomsDoNotFold(t *testing.T) {
	t.Parallel()
	p := chirps(t, rate16, 5, 1)
	r := rand.New(rand.NewPCG(1, 2))
	room := make([]float64, rate16/2)
	for n := range room {
		room[n] = 0.05 * r.NormFloat64() * math.Pow(10, -3*float64(n)/float64(len(room)))
	}
	room[0] = 1
	echo := make([]float64, rate16/2)
	echo[0], echo[3*rate16/10] = 1, 0.1
	for name, h := range map[string][]float64{"room": room, "echo": echo} {
		y := convolved(device{offset: 100, gain: 1, noise: noiseUnder(p, 60), tail: rate16}.record(p, 1), h)
		c := only(t, measured(t, p, y))
		if len(c.Warnings) > 0 {
			t.Errorf("%s: %q", name, c.Warnings)
		}
		if name == "echo" {
			// 0.1² of the energy, 0.3 s after the rest, up to 0.46 of the rate: what is above is
			// not measured, and continued without it.
			within(t, "late energy beyond 20 ms", c.Figures.PostRing.White.Beyond[2], 10*math.Log10(0.01/1.01*0.92), 0.1)
		}
	}
}

// convolved is y filtered by h, as long as y.
func convolved(y, h []float64) []float64 {
	size := response.NextPow2(len(y) + len(h))
	a, b := response.Spectrum(y, size), response.Spectrum(h, size)
	for k := range a {
		a[k] *= b[k] / complex(float64(size), 0)
	}
	return fourier.NewFFT(size).Sequence(nil, a)[:len(y)]
}
