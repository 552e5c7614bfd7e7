package stream

import (
	"math/bits"
	"testing"

	"fettle/filter/stream/machine"
)

// TestBlockSizes: whatever is asked, a power of two that leaves a hop, or none.
func TestBlockSizes(t *testing.T) {
	for _, kernel := range machine.Available() {
		for taps := 1; taps <= 1<<20; taps += 1 + taps/20 {
			for _, frames := range []int64{-1, 0, 1, 1000, 48000, 1 << 32} {
				for _, channels := range []int{1, 2, 3} {
					size := blockSize(taps, channels, Run{frames, kernel})
					if size != 0 && (size < taps || bits.OnesCount(uint(size)) != 1) {
						t.Errorf("%v, %d taps, %d frames, %d channels: blocks of %d", kernel, taps, frames, channels, size)
					}
				}
			}
		}
	}
}

// TestPlannerIsSensible: few taps are summed directly; a long stream does not lose
// more than half of each block to the overlap; a short one does not pay for a block
// of four times its length.
func TestPlannerIsSensible(t *testing.T) {
	for _, kernel := range machine.Available() {
		if size := blockSize(1, 2, Run{-1, kernel}); size != 0 {
			t.Errorf("%v: one tap is done in blocks of %d", kernel, size)
		}
		for _, taps := range []int{255, 4095, 65535, 530333} {
			size := blockSize(taps, 2, Run{-1, kernel})
			if size < 2*(taps-1) || size > 64*taps {
				t.Errorf("%v: %d taps are done in blocks of %d", kernel, taps, size)
			}
			for _, frames := range []int64{1000, 48000, 480000} {
				short := blockSize(taps, 2, Run{frames, kernel})
				if need := int(frames) + taps - 1; short >= 4*max(need, 256) {
					t.Errorf("%v: %d frames and %d taps are done in blocks of %d", kernel, frames, taps, short)
				}
			}
		}
	}
}

// TestPlannerTakesTheCheapest of all, by its own sums.
func TestPlannerTakesTheCheapest(t *testing.T) {
	for _, kernel := range machine.Available() {
		for _, taps := range []int{5, 100, 4095, 100000} {
			for _, frames := range []int64{-1, 3000, 1 << 20} {
				run := Run{frames, kernel}
				size := blockSize(taps, 1, run)
				least := directCost(taps, 1, run)
				if size > 0 {
					least = blocksCost(taps, size, 1, run)
				}
				for other := 256; other <= largestBlock(taps); other *= 2 {
					if other >= taps && blocksCost(taps, other, 1, run) < least {
						t.Errorf("%v, %d taps, %d frames: blocks of %d, but %d are cheaper", kernel, taps, frames, size, other)
					}
				}
			}
		}
	}
}

// TestPlannedBlocks are what outputs depend on: a change of costs.go that moves
// them changes bytes, and so the version.
func TestPlannedBlocks(t *testing.T) {
	for _, c := range []struct {
		kernel   machine.Kernel
		taps     int
		frames   int64
		channels int
		want     int
	}{
		{machine.Portable, 3, -1, 2, 0},
		{machine.Portable, 15, -1, 2, 0},
		{machine.Portable, 255, -1, 2, 4096},
		{machine.Portable, 1023, -1, 2, 131072},
		{machine.Portable, 4095, -1, 2, 131072},
		{machine.Portable, 16383, -1, 1, 131072},
		{machine.Portable, 65535, -1, 2, 262144},
		{machine.Portable, 4095, 48000, 1, 32768},
		{machine.Portable, 4095, 480000, 2, 131072},
		{machine.Portable, 530333, -1, 2, 2097152},
		{machine.AVX2, 3, -1, 2, 0},
		{machine.AVX2, 15, -1, 2, 512},
		{machine.AVX2, 255, -1, 2, 8192},
		{machine.AVX2, 1023, -1, 2, 8192},
		{machine.AVX2, 4095, -1, 2, 131072},
		{machine.AVX2, 16383, -1, 1, 131072},
		{machine.AVX2, 65535, -1, 2, 262144},
		{machine.AVX2, 4095, 48000, 1, 32768},
		{machine.AVX2, 4095, 480000, 2, 131072},
		{machine.AVX2, 530333, -1, 2, 2097152},
		{machine.AVX512, 3, -1, 2, 512},
		{machine.AVX512, 15, -1, 2, 512},
		{machine.AVX512, 255, -1, 2, 8192},
		{machine.AVX512, 1023, -1, 2, 8192},
		{machine.AVX512, 4095, -1, 2, 131072},
		{machine.AVX512, 16383, -1, 1, 131072},
		{machine.AVX512, 65535, -1, 2, 262144},
		{machine.AVX512, 4095, 48000, 1, 32768},
		{machine.AVX512, 4095, 480000, 2, 131072},
		{machine.AVX512, 530333, -1, 2, 2097152},
	} {
		if got := blockSize(c.taps, c.channels, Run{c.frames, c.kernel}); got != c.want {
			t.Errorf("%v, %d taps, %d frames, %d channels: blocks of %d, want %d", c.kernel, c.taps, c.frames, c.channels, got, c.want)
		}
	}
}
