package stream

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"fettle/filter/stream/machine"
)

// TestAccuracy of a long kernel of unit norm on noise at full scale: the error's
// RMS, against sums of twice the precision, is below 1e-14 of full scale.
func TestAccuracy(t *testing.T) {
	const taps, frames, places = 65535, 300_000, 150
	h := noise(50, taps)
	for i, scale := 0, norm(h); i < taps; i++ {
		h[i] /= scale
	}
	f, x := NewFIR(h), noisePlanes(51, 2, frames)
	r := rand.New(rand.NewPCG(52, 0))
	var at [places]int
	var want [places]float64
	for i := range at {
		at[i] = taps + r.IntN(frames-taps)
		want[i] = slowFIRAt(h, x[i%2], at[i])
	}
	for _, kernel := range machine.Available() {
		y := runChannels(f.Kernel(2, Run{-1, kernel}), x)
		var square float64
		for i, n := range at {
			d := y[i%2][n] - want[i]
			square += d * d
		}
		rms := math.Sqrt(square / places)
		t.Logf("%v: %.2g", kernel, rms)
		if !(rms < 1e-14) {
			t.Errorf("%v: error %.3g of full scale, want less than 1e-14", kernel, rms)
		}
	}
}

// FuzzFIR compares taps, channels, lengths and splits of any kind with the direct
// convolution.
func FuzzFIR(f *testing.F) {
	f.Add(uint64(1), uint16(100), uint8(2), uint16(3000), uint8(0), uint16(700), int16(-1))
	f.Add(uint64(2), uint16(1), uint8(1), uint16(0), uint8(2), uint16(1), int16(0))
	f.Add(uint64(3), uint16(2500), uint8(3), uint16(9000), uint8(1), uint16(4096), int16(500))
	f.Add(uint64(4), uint16(40), uint8(5), uint16(2000), uint8(2), uint16(13), int16(2000))
	f.Fuzz(func(t *testing.T, seed uint64, taps uint16, channels uint8, frames uint16, way uint8, step uint16, announced int16) {
		h := noise(seed, 1+int(taps)%4096)
		all := machine.Available()
		run := Run{Frames: int64(announced), Kernel: all[int(way)%len(all)]}
		count := 1 + int(channels)%6
		k := NewFIR(h).Kernel(count, run)
		x := noisePlanes(seed+1, count, int(frames)%20_000+min(k.Delay(), 40_000))
		y := planes(count, len(x[0]))
		for from := 0; from < len(x[0]); {
			to := min(len(x[0]), from+1+int(step)%9000)
			k.Process(cut(y, from, to), cut(x, from, to))
			from = to
		}
		tol := 2 * blockError(h)(1)
		for c := range y {
			for n := int(seed % 97); n < len(y[c]); n += 97 {
				want := 0.0
				if n >= k.Delay() {
					want = slowFIRAt(h, x[c], n-k.Delay())
				}
				if !(math.Abs(y[c][n]-want) <= tol) {
					t.Fatalf("%s: channel %d, sample %d: %g, want %g within %g", fmt.Sprint(run), c, n, y[c][n], want, tol)
				}
			}
		}
	})
}
