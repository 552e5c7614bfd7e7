package audio

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"fettle/audio/asmtest"
	"fettle/audio/internal/vector/vectortest"
)

func TestAssemblyIsCurrent(t *testing.T) {
	asmtest.Current(t, "_asm", "./meter", "-out", "../kernels_amd64.s", "-stubs", "../kernels_amd64.go", "-pkg", "audio")
}

func TestPuregoHasNoAssembly(t *testing.T) { asmtest.WithoutAssembly(t, "kernels_amd64.s") }

// group is how many windows the assembly looks at together.
const group = 8

// TestExtremes: of every chunk, to the bit. Whole numbers make all differences exact.
func TestExtremes(t *testing.T) {
	vectortest.Each(t, func(t *testing.T) {
		r := rand.New(rand.NewPCG(9, 10))
		for _, stride := range []int{1, 2, 3, 6} {
			const chunks = 3
			size := chunkFrames * stride
			x := make([]float64, 2*stride+chunks*size)
			for i := range x {
				x[i] = math.Floor(r.NormFloat64() * 1000)
			}
			maxima, bends := make([]float64, chunks), make([]float64, chunks)
			extremes(maxima, bends, x, stride, size)
			for j := range chunks {
				var peak, bend float64
				for i := 2*stride + j*size; i < 2*stride+(j+1)*size; i++ {
					peak = max(peak, math.Abs(x[i]))
					bend = max(bend, math.Abs(x[i]-2*x[i-stride]+x[i-2*stride]))
				}
				if maxima[j] != peak || bends[j] != bend {
					t.Errorf("stride %d, chunk %d: %v and %v, want %v and %v", stride, j, maxima[j], bends[j], peak, bend)
				}
			}
		}
	})
}

// TestLargest: of any length, whatever the signs.
func TestLargest(t *testing.T) {
	r := rand.New(rand.NewPCG(9, 10))
	for n := range 40 {
		peak, x := 0., make([]float64, n)
		for i := range x {
			x[i] = r.NormFloat64()
			peak = max(peak, math.Abs(x[i]))
		}
		if got := largest(x); got != peak {
			t.Errorf("largest of %v: %v, want %v", x, got, peak)
		}
	}
}

// windowAt is the window that starts with x[i].
func windowAt(x []float64, i, stride int) (w window) {
	for k := range w {
		w[k] = x[i+k*stride]
	}
	return w
}

// TestPointsAreTheSame: where nothing may be passed over, the peak of all windows is
// found to the bit, and where everything may, none. Of the special values, a NaN
// that comes of an infinity counts for nothing.
func TestPointsAreTheSame(t *testing.T) {
	special := []float64{0, math.Copysign(0, -1), math.SmallestNonzeroFloat64, -0x1p-1040, 1e308, -1e308, math.Inf(1), math.Inf(-1), math.NaN()}
	all, nothing := slacks{math.Inf(1), math.Inf(1)}, slacks{math.Inf(-1), math.Inf(-1)}
	vectortest.Each(t, func(t *testing.T) {
		r := rand.New(rand.NewPCG(13, 14))
		for trial := range 400 {
			stride := 1 + trial%5
			x := chunkOf(r, stride)
			for range trial % 7 {
				x[r.IntN(len(x))] = special[r.IntN(min(len(special), 1+trial/40))]
			}
			want := 0.
			for i := range chunkFrames * stride {
				w := windowAt(x, i, stride)
				for _, v := range []float64{interpolator.middlePeak(&w), interpolator.sidePeak(&w)} {
					if v > want {
						want = v
					}
				}
			}
			if got := points(x, stride, &interpolator.rough, all, 0); got != want {
				t.Fatalf("stride %d: %v, want %v", stride, got, want)
			}
			if got := points(x, stride, &interpolator.rough, all, 2*want); got != 2*want {
				t.Fatalf("stride %d: %v, want the peak before, %v", stride, got, 2*want)
			}
			if slices.ContainsFunc(x, func(v float64) bool { return v-v != 0 }) {
				continue
			}
			if got := points(x, stride, &interpolator.rough, nothing, 0); got != 0 {
				t.Fatalf("stride %d: %v where nothing is to be looked at", stride, got)
			}
		}
	})
}

// chunkOf is noise for points, no longer than it may read.
func chunkOf(r *rand.Rand, stride int) []float64 {
	x := asmtest.Fenced[float64](stride*(chunkFrames+interpolatorTaps-1), false)
	for i := range x {
		x[i] = 2*r.Float64() - 1
	}
	return x
}

// TestSketchDecides: with a limit just below the largest value of any sketch, the
// window with that value is interpolated, and none but those that are looked at
// together with it; with a limit just above, none.
func TestSketchDecides(t *testing.T) {
	const doubt = 1e-9 // far more than the roundings of six products
	vectortest.Each(t, func(t *testing.T) {
		r := rand.New(rand.NewPCG(15, 16))
		for trial := range 200 {
			stride := 1 + trial%4
			x := chunkOf(r, stride)
			var s sketch
			for _, c := range [][]float64{s.middle[:], s.even[:], s.odd[:]} {
				for k := range c {
					c[k] = r.NormFloat64()
				}
			}
			ofMiddle := trial%2 == 0
			at, top := loudest(x, stride, &s, ofMiddle)
			slack := func(factor float64) slacks { // the peak is 0
				if ofMiddle {
					return slacks{-factor * top, math.Inf(-1)}
				}
				return slacks{math.Inf(-1), -factor * top}
			}
			if got := points(x, stride, &s, slack(1+doubt), 0); got != 0 {
				t.Fatalf("stride %d: %v where no sketch is above the limit", stride, got)
			}
			least, most := around(x, at, stride, ofMiddle)
			if got := points(x, stride, &s, slack(1-doubt), 0); !(got >= least && got <= most) {
				t.Fatalf("stride %d: %v, want %v at the least and %v at the most", stride, got, least, most)
			}
		}
	})
}

// loudest is where a sketch has its largest value, and that value.
func loudest(x []float64, stride int, s *sketch, ofMiddle bool) (at int, top float64) {
	for i := range chunkFrames * stride {
		w := windowAt(x, i, stride)
		v := max(math.Abs(dot(s.of(1./4), w)), math.Abs(dot(s.of(3./4), w)))
		if ofMiddle {
			v = math.Abs(dot(s.of(2./4), w))
		}
		if v > top {
			at, top = i, v
		}
	}
	return at, top
}

// around is the peak of one kind in a window, and of both kinds in the group it is in.
func around(x []float64, at, stride int, ofMiddle bool) (least, most float64) {
	w := windowAt(x, at, stride)
	least = interpolator.sidePeak(&w)
	if ofMiddle {
		least = interpolator.middlePeak(&w)
	}
	for i := at / group * group; i < at/group*group+group; i++ {
		w := windowAt(x, i, stride)
		most = max(most, interpolator.peak(&w))
	}
	return least, most
}

// TestMeterMakesNoGarbage: once made, it allocates nothing, however it is asked.
func TestMeterMakesNoGarbage(t *testing.T) {
	vectortest.Each(t, func(t *testing.T) {
		x := noise(2 * 5000)
		m := NewMeter(2)
		if n := testing.AllocsPerRun(10, func() {
			m.Add(x)
			m.Add(x[:2])
			if !(m.TruePeak() > m.SamplePeak()) {
				t.Error("noise does not swing over")
			}
		}); n != 0 {
			t.Errorf("%v allocations a run, want none", n)
		}
	})
}
