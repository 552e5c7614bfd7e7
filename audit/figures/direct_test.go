package figures

import (
	"math"
	"math/cmplx"
	"testing"
)

// By blocks or sample by sample, a band's transforms are the same to rounding: some
// 1e-16 of what they are summed from, with a random walk's growth over 5000 samples.
func TestTransformNearABand(t *testing.T) {
	x := decaying(11, 5000)
	const mid = 700.5
	var sum, moments float64
	for n, v := range x {
		sum += math.Abs(v)
		moments += math.Abs((float64(n) - mid) * v)
	}
	blocks := 0
	for _, b := range Bands(rate48) {
		near := newNearBand(x, mid, b, rate48)
		if near.block > 0 {
			blocks++
		}
		for _, f := range []float64{b.Lower, b.Centre, 0.3*b.Lower + 0.7*b.Upper, b.Upper} {
			h, nh := near.at(f)
			wantH, wantNH := transformAt(x, mid, f, rate48)
			within(t, "DFT(x)", cmplx.Abs(h-wantH), 0, 1e-14*sum)
			within(t, "DFT((n-mid)·x)", cmplx.Abs(nh-wantNH), 0, 1e-14*moments)
		}
	}
	if blocks < 5 || blocks == len(Bands(rate48)) {
		t.Errorf("%d of %d bands by blocks: one road is not tested", blocks, len(Bands(rate48)))
	}
}
