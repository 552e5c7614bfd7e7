package response

import (
	"math"
	"math/cmplx"
	"math/rand/v2"
	"runtime"
	"testing"
)

func noise(seed uint64, n int) []float64 {
	rng := rand.New(rand.NewPCG(seed, 3))
	x := make([]float64, n)
	for i := range x {
		x[i] = rng.NormFloat64()
	}
	return x
}

// Sizes and lengths that are made whole, of combs, of combs onto which the sequence is
// folded, of few and of many, of a size with a factor of three, and of one that cannot be
// halved.
var transforms = []struct{ size, length int }{
	{2, 1}, {64, 64}, {2048, 2048}, {2048, 100}, {4096, 1}, {1 << 14, 1 << 14}, {3 << 12, 2500},
	{1 << 15, 8000}, {1 << 17, 30000}, {1 << 18, 1 << 18}, {3 << 17, 1000}, {2 * 1231, 9}, {1 << 19, 70000},
}

// Each bin comes once, and every way gives what Horner's rule does, up to the rounding of
// both: 1e-16 times the sum of |x|, with a random walk's growth.
func TestTransform(t *testing.T) {
	for _, c := range transforms {
		x := noise(uint64(c.size), c.length)
		const origin = 3.5
		moments, sum, momentSum := make([]float64, len(x)), 0.0, 0.0
		for n, v := range x {
			moments[n] = (float64(n) - origin) * v
			sum += math.Abs(v)
			momentSum += math.Abs(moments[n])
		}
		seen := make([]int, c.size/2+1)
		got := make([][2]complex128, c.size/2+1)
		NewTransform(c.size, c.length).Each(func(k int, v []complex128) {
			seen[k]++
			got[k] = [2]complex128(v)
		}, Sequence{X: x}, Sequence{X: x, Moments: true, Origin: origin})
		for k, n := range seen {
			if n != 1 {
				t.Fatalf("%+v: bin %d comes %d times", c, k, n)
			}
		}
		tol := 1e-15 * math.Sqrt(float64(c.length))
		for i := range 40 {
			k := i * (c.size / 2) / 39
			omega := 2 * math.Pi * float64(k) / float64(c.size)
			near(t, "DFT(x)", cmplx.Abs(got[k][0]-TapsAt(x, omega)), 0, tol*sum)
			near(t, "DFT((n - origin) x)", cmplx.Abs(got[k][1]-TapsAt(moments, omega)), 0, tol*momentSum)
		}
	}
}

// A part of the bins is the same as of all, and a second use forgets the first.
func TestTransformWithin(t *testing.T) {
	for _, c := range transforms {
		x := noise(5, c.length)
		whole := Spectrum(x, c.size)
		transform := NewTransform(c.size, c.length)
		transform.Each(func(int, []complex128) {}, Sequence{X: noise(6, c.length)})
		first, last, visits := c.size/9, c.size/4, 0
		transform.Within(first, last, func(k int, v []complex128) {
			visits++
			if k < first || k > last || v[0] != whole[k] {
				t.Errorf("%+v: bin %d is %v, want %v from %d to %d", c, k, v[0], whole[k], first, last)
			}
		}, Sequence{X: x})
		if visits != last-first+1 {
			t.Errorf("%+v: %d bins, want %d", c, visits, last-first+1)
		}
	}
}

// How many cores there are changes no bit, and not the order of visits on which sums depend.
func TestTransformIsTheSameOnAnyMachine(t *testing.T) {
	x := noise(8, 5000)
	visits := func() (ks []int, vs []complex128) {
		NewTransform(1<<18, len(x)).Each(func(k int, v []complex128) { ks, vs = append(ks, k), append(vs, v[0]) }, Sequence{X: x})
		return ks, vs
	}
	defer runtime.GOMAXPROCS(runtime.GOMAXPROCS(1))
	ks, vs := visits()
	runtime.GOMAXPROCS(4)
	ks4, vs4 := visits()
	for i := range ks {
		if ks[i] != ks4[i] || vs[i] != vs4[i] {
			t.Fatalf("visit %d: bin %d %v on one core, bin %d %v on four", i, ks[i], vs[i], ks4[i], vs4[i])
		}
	}
}

// The square of a transform is that of the sequence convolved with itself.
func TestTransformMap(t *testing.T) {
	for _, c := range transforms[2:] {
		x := noise(9, min(60, c.length))
		got := NewTransform(c.size, c.length).Map(x, func(c complex128) complex128 { return c * c }, min(150, c.size))
		for n := range got {
			want := 0.0
			for i, v := range x {
				if n-i >= 0 && n-i < len(x) {
					want += v * x[n-i]
				}
			}
			near(t, "x convolved with x", got[n], want, 1e-12) // some 60 products of up to 10, and rounding
		}
	}
}

// What a transform of four million points takes is a small part of its 34 MB of bins.
func TestTransformTakesLittleMemory(t *testing.T) {
	x := noise(10, 1<<16)
	var before, after runtime.MemStats
	runtime.ReadMemStats(&before)
	NewTransform(1<<22, len(x)).Each(func(int, []complex128) {}, Sequence{X: x})
	runtime.ReadMemStats(&after)
	if mb := float64(after.TotalAlloc-before.TotalAlloc) / 1e6; !(mb < 4) {
		t.Errorf("%.1f MB were allocated, allowed 4", mb)
	}
}

func TestTransformPanics(t *testing.T) {
	for _, c := range [][2]int{{0, 0}, {3, 1}, {1 << 12, 1<<12 + 1}} {
		func() {
			defer func() {
				if recover() == nil {
					t.Errorf("%d points for %d samples were accepted", c[0], c[1])
				}
			}()
			NewTransform(c[0], c[1])
		}()
	}
}

// From its magnitude a minimum-phase sequence comes back: two zeros and a pole, all inside
// the unit circle (Oppenheim & Schafer, chapter on cepstrum analysis).
func TestMinimumPhase(t *testing.T) {
	want := Impulse([]Section{{B0: 2, B1: -0.6, B2: 0.5, A1: -0.7}}, 300)
	for _, size := range []int{512, 3 << 12} { // whole and of combs; 0.7^512 is 5e-80
		logs := make([]float64, size/2+1)
		for k := range logs {
			logs[k] = math.Log(cmplx.Abs(TapsAt(want, 2*math.Pi*float64(k)/float64(size))))
		}
		for n, got := range MinimumPhase(logs, len(want)) {
			near(t, "sample", got, want[n], 1e-13)
		}
	}
}

func BenchmarkTransform(b *testing.B) {
	for _, c := range []struct {
		name         string
		size, length int
	}{{"dense", 1 << 19, 4096}, {"long", 1 << 20, 65536}, {"whole", 1 << 16, 1 << 16}} {
		x := noise(1, c.length)
		b.Run(c.name, func(b *testing.B) {
			b.ReportAllocs()
			transform := NewTransform(c.size, c.length)
			for b.Loop() {
				transform.Each(func(int, []complex128) {}, Sequence{X: x})
			}
		})
	}
}
