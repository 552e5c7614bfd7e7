package figures

import (
	"math"
	"math/cmplx"
	"testing"
)

// In one block or in many, a convolution is the sum that defines it.
func TestConvolver(t *testing.T) {
	kernel := decaying(1, 37)
	for _, length := range []int{1, 20, 300, 1001} {
		for _, longest := range []int{length, 30} {
			x := decaying(2, length)
			got := newConvolver(kernel, longest).of(x)
			if len(got) != length+len(kernel)-1 {
				t.Fatalf("%d samples, want %d", len(got), length+len(kernel)-1)
			}
			for n, v := range got {
				want := 0.0
				for i := max(0, n-len(kernel)+1); i <= min(n, length-1); i++ {
					want += x[i] * kernel[n-i]
				}
				within(t, "convolution", v, want, 1e-13)
			}
		}
	}
}

func TestAroundZero(t *testing.T) {
	const n = 3 << 8
	c := func(k int) complex128 { return complex(1/float64(1+k), math.Cos(float64(k))) }
	for _, least := range []int{3, 50, n} {
		got := aroundZero(c, n, least)
		if len(got) < least {
			t.Fatalf("%d indices, want %d", len(got), least)
		}
		for i := -(least / 2); i < least/2; i++ {
			var want complex128
			for k := 0; k <= n/2; k++ {
				want += c(k) * turn(2*math.Pi*float64(k*i%n)/n)
			}
			within(t, "sum", cmplx.Abs(got[(i+len(got))%len(got)]-want), 0, 1e-12)
		}
	}
}
