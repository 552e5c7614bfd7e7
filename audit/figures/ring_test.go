package figures

import (
	"math"
	"testing"

	"fettle/filter/response"
)

// A resonance of decay constant τ loses 60 dB in ln(1000)·τ (room acoustics' reverberation time, ISO 3382):
// the band that holds it rings that long, less than two periods of the cut apart.
func TestBandRingIsReverberationTime(t *testing.T) {
	const rate, tau = rate8, 0.02
	for _, centre := range []float64{500, 1000, 2000} {
		h := make([]float64, 6000)
		for n := range h {
			at := float64(n) / rate
			h[n] = math.Exp(-at/tau) * math.Cos(2*math.Pi*centre*at)
		}
		for _, b := range Measure(Response{H: h, Rate: rate}).Bands {
			if b.Nominal != centre {
				continue
			}
			want := math.Log(1000) * tau
			within(t, "post-ring", b.PostRing, want, leastPeriods/centre)
			within(t, "pre-ring", b.PreRing, 0, 0)
		}
	}
}

// half is the length of one side of the kernel whose rings are searched the slow way.
const half = 350

// Band ring against the definition taken literally: the whole response cut, one long transform,
// every sample tried from the far end.
func TestBandRingAgainstDefinition(t *testing.T) {
	const rate = 2000.0
	x := zeroPhase(butterworth(4, 100, openTop, rate, 800), half)
	ringer := newRinger(x, rate)
	s := newSpectrum(x, half, rate, 1)
	s.moments()
	rung := 0
	for _, b := range Bands(rate) {
		whole := s.sample(b).energy()
		got := ringer.early(b, whole)
		within(t, "band ring", got, slowRing(x, b, rate, whole), max(1.5/rate, 2e-3*got))
		if got > 0 {
			rung++
		}
	}
	if rung < 8 {
		t.Errorf("only %d bands ring: too few to tell", rung)
	}
}

// slowRing is the definition: a transform of 2^13 points holds 18 bins even of the 20 Hz band.
func slowRing(x []float64, b Band, rate, whole float64) float64 {
	const size = 1 << 13
	period := rate / b.Centre
	for before := half; float64(before) >= 2*period; before-- {
		y := make([]float64, len(x))
		for n, v := range x {
			switch u := (float64(n-half+before) + 2*period) / (4 * period); {
			case u <= 0:
				y[n] = v
			case u < 1:
				y[n] = v * 0.5 * (1 + math.Cos(math.Pi*u))
			}
		}
		var e float64
		h := response.Spectrum(y, size)
		response.EachBin(rate/size, b.Lower, b.Upper, func(k int, width float64) { e += width * power(h[k]) })
		if e >= 1e-6*whole {
			return float64(before) / rate
		}
	}
	return 0
}

// The length of the post-ring is the same taken by itself, and not stated of nothing.
func TestRingsFor(t *testing.T) {
	for _, h := range [][]float64{decaying(3, 2000), zeroPhase(butterworth(4, 100, openTop, rate8, 800), half), {0, 1, 0}} {
		f := Measure(Response{H: h, Rate: rate8})
		white, pink := RingsFor(h, rate8)
		within(t, "white", white, f.PostRing.White.Length, 1e-9)
		within(t, "pink", pink, f.PostRing.Pink.Length, 1e-9)
	}
	if white, pink := RingsFor([]float64{0, 0}, rate8); !math.IsNaN(white) || !math.IsNaN(pink) {
		t.Errorf("silence rings for %g and %g s", white, pink)
	}
}
