package design

import (
	"math/rand/v2"
	"testing"

	"fettle/filter/response"
)

// randomMask draws edges upwards from rate/400 to rate/20, each 1.1 to 2.5
// times the last; ok is false if they do not fit under half the rate.
func randomMask(rng *rand.Rand) (m Mask, ok bool) {
	rates := []float64{8000, 16000, 44100, 48000, 96000, 192000}
	m = Mask{Kind: Kind(rng.IntN(4)), Rate: rates[rng.IntN(len(rates))]}
	m.RippleDB, m.RejectDB = 0.01+0.5*rng.Float64(), 20+90*rng.Float64()
	hz := m.Rate/400 + rng.Float64()*m.Rate/20
	below := m.Kind.passesDC()
	for i := range m.Kind.Edges() {
		lower, upper := hz, hz*(1.1+1.4*rng.Float64())
		hz = upper * (1.1 + 1.4*rng.Float64())
		m.Pass[i], m.Stop[i] = lower, upper
		if !below {
			m.Pass[i], m.Stop[i] = upper, lower
		}
		below = !below
		ok = upper < m.Rate/2
	}
	return m, ok
}

// TestRandomMasks: the formulas are estimates only; what is returned must meet
// the mask as measured, and the elliptic order must be the formula's, or one
// more where that one misses by rounding and margin.
func TestRandomMasks(t *testing.T) {
	rng := rand.New(rand.NewPCG(20, 26))
	drawn := 0
	for drawn < 40 {
		m, ok := randomMask(rng)
		if !ok {
			continue
		}
		drawn++
		checkRandomMask(t, m)
	}
}

func checkRandomMask(t *testing.T, m Mask) {
	t.Helper()
	f, order, err := EllipticFor(m)
	noError(t, err)
	s := f.Sections()
	if got := MeasureSections(s, m); !got.Meets(m) || !response.Stable(s) {
		t.Errorf("elliptic %+v: %+v", m, got)
	}
	_, selectivity := m.selectivity()
	if least := ellipticOrder(2*m.RippleDB, m.RejectDB+m.RippleDB, selectivity); !(float64(order) < least+1.01) {
		t.Errorf("elliptic %+v: order %d where the formula says %.3f", m, order, least)
	}
	taps, err := Kaiser(m)
	noError(t, err)
	if got := MeasureTaps(taps, m); !got.Meets(m) || len(taps)%2 == 0 {
		t.Errorf("kaiser %+v: %d taps, %+v", m, len(taps), got)
	}
}
