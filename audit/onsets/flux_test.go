package onsets

import (
	"math"
	"testing"
)

// fluxOf is the detection function of a signal.
func fluxOf(rate int, x []float64) []float64 {
	f := newFlux(float64(rate))
	var values []float64
	for at := 0; at+len(f.frame) <= len(x); at += f.hop {
		copy(f.frame, x[at:])
		values = append(values, f.next())
	}
	return values
}

// The window makes a sine of amplitude a a bin of power a²; its neighbours, half the
// amplitude each, make the band 1.5 times that.
func TestPowerOfABand(t *testing.T) {
	f := newFlux(48000)
	bin := 200
	for n := range f.frame {
		f.frame[n] = 0.5 * math.Cos(2*math.Pi*float64(bin*n)/float64(len(f.frame)))
	}
	f.next()
	within(t, "the loudest band", f.loudest, 1.5*0.25, 1e-9)
}

// Bands are in order, a bin or more each, and reach what they should.
func TestBandEdges(t *testing.T) {
	for _, rate := range []float64{leastRate, 8000, 11025, 22050, 44100, 192000, 384000} {
		f := newFlux(rate)
		hz := rate / float64(len(f.frame))
		for i, e := range f.edges[1:] {
			if e <= f.edges[i] {
				t.Fatalf("%g Hz: band %d ends at bin %d and begins at %d", rate, i, e, f.edges[i])
			}
		}
		if first := float64(f.edges[0]) * hz; first < fluxFrom || first >= fluxFrom+hz {
			t.Errorf("%g Hz: begins at %g Hz", rate, first)
		}
		if last := f.edges[len(f.edges)-1]; float64(last)*hz < min(fluxTo, 0.45*rate) || last > len(f.spectrum) {
			t.Errorf("%g Hz: ends at bin %d of %d", rate, last, len(f.spectrum))
		}
	}
}

// All bands up by 10 dB is a flux of 10 dB, all down is none; a partial that moves
// by a band is none either.
func TestRises(t *testing.T) {
	before := []float64{1, 1, 1, 1}
	within(t, "up", rises([]float64{10, 10, 10, 10}, before, 1e-12), 10, 1e-6)
	within(t, "one up", rises([]float64{1, 10, 1, 1}, before, 1e-12), 2.5, 1e-6)
	within(t, "down", rises([]float64{0.1, 0.1, 0, 0}, before, 1e-12), 0, 0)
	within(t, "glide", rises([]float64{0, 1, 0, 0}, []float64{1, 0, 0, 0}, 1e-12), 0, 0)
	within(t, "leap", rises([]float64{0, 0, 1, 0}, []float64{1, 0, 0, 0}, 0.01), 10*math.Log10(101)/4, 1e-6)
}

// A tone of 6 octaves a second, whose partial crosses a band in 14 ms, has less
// flux than one that starts at a quarter of its level.
func TestFluxOfAGlide(t *testing.T) {
	const rate = 48000
	x := silence(rate, 1)
	for n := range x {
		at := float64(n) / rate
		x[n] = 0.3 * math.Sin(2*math.Pi*200/(3*math.Ln2)*math.Expm1(3*math.Ln2*at))
	}
	glide := highestOf(fluxOf(rate, x)[5:])
	y := silence(rate, 1)
	tone(y, rate, 1000, 0, func(float64) float64 { return 0.3 })
	tone(y, rate, 3000, 0.5, func(float64) float64 { return 0.075 })
	start := highestOf(fluxOf(rate, y)[5:])
	t.Logf("glide %.2f dB, start %.2f dB", glide, start)
	if !(glide < 0.5*start) || !(start > pickOver) {
		t.Errorf("glide %g dB, start %g dB", glide, start)
	}
}

func highestOf(x []float64) float64 { return x[highest(x)] }

func TestPicker(t *testing.T) {
	var p picker
	values := make([]float64, 100)
	values[20] = 5 // a peak
	values[22] = 4 // too near a higher one
	values[40] = 0.9
	values[60], values[61] = 3, 3 // the first of equals
	for i := 80; i < 100; i++ {
		values[i] = 6 // no peak: it stays
	}
	values[90] = 6.5 // too little over the mean
	var got []int
	for i, v := range values {
		if p.push(v) {
			got = append(got, i-pickAfter)
		}
	}
	want := []int{20, 60, 80}
	if len(got) != len(want) || got[0] != 20 || got[1] != 60 || got[2] != 80 {
		t.Errorf("peaks at %v, want %v", got, want)
	}
}
