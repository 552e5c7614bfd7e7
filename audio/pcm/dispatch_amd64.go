//go:build !purego

package pcm

import "fettle/audio/internal/vector"

//go:generate go -C ../_asm run ./pcm -out ../pcm/kernels_amd64.s -stubs ../pcm/kernels_amd64.go -pkg pcm

// groupSamples is how many samples the assembly takes at once. It checks no bounds.
const groupSamples = 8

// groups is how many of n samples the assembly can take.
func groups(n int) int {
	if vector.Used() == vector.None {
		return 0
	}
	return max(0, n) / groupSamples * groupSamples
}

// behind is how many samples have to follow those that the assembly takes: it
// reads and writes three-byte samples in pieces that reach four bytes beyond a
// group. What it writes there comes before what belongs there.
func behind(e Encoding) int {
	if e.Bytes == 3 {
		return 2
	}
	return 0
}

func decodeBulk(dst []float64, src []byte, e Encoding) int {
	n := groups(len(dst) - behind(e))
	if n == 0 {
		return 0
	}
	switch {
	case e.Float && e.Bytes == 8:
		decodeFloat64AVX2(&dst[0], &src[0], n)
	case e.Float:
		decodeFloat32AVX2(&dst[0], &src[0], n)
	case e.Bytes == 1:
		decode8AVX2(&dst[0], &src[0], n)
	case e.Bytes == 2:
		decode16AVX2(&dst[0], &src[0], n)
	case e.Bytes == 3:
		decode24AVX2(&dst[0], &src[0], n)
	default:
		decode32AVX2(&dst[0], &src[0], n)
	}
	return n
}

func roundBulk(dst []byte, src, noise []float64, e Encoding, scale, safe float64) int {
	n := groups(len(src) - behind(e))
	if n == 0 {
		return 0
	}
	shift := uint64(8*e.Bytes - e.Bits)
	switch e.Bytes {
	case 1:
		return encode8AVX2(&dst[0], &src[0], &noise[0], n, scale, safe, shift)
	case 2:
		return encode16AVX2(&dst[0], &src[0], &noise[0], n, scale, safe, shift)
	case 3:
		return encode24AVX2(&dst[0], &src[0], &noise[0], n, scale, safe, shift)
	}
	return encode32AVX2(&dst[0], &src[0], &noise[0], n, scale, safe, shift)
}

func floatBulk(dst []byte, src []float64, e Encoding) int {
	n := groups(len(src))
	switch {
	case n == 0:
		return 0
	case e.Bytes == 8:
		return encodeFloat64AVX2(&dst[0], &src[0], n)
	}
	return encodeFloat32AVX2(&dst[0], &src[0], n)
}

func (d *Dither) draw(dst []float64) {
	steps := len(dst) / ditherLanes
	switch used := vector.Used(); {
	case steps == 0:
	case used == vector.AVX512:
		drawAVX512(&dst[0], &d.state, steps)
	case used == vector.AVX2:
		drawAVX2(&dst[0], &d.state, steps)
	default:
		d.drawGeneric(dst)
	}
}

func pairsBulk(dst, left, right []float64) int {
	n := groups(len(left))
	if n == 0 {
		return 0
	}
	pairsAVX2(&dst[0], &left[0], &right[0], n)
	return n
}

func unpairsBulk(left, right, src []float64) int {
	n := groups(len(left))
	if n == 0 {
		return 0
	}
	unpairsAVX2(&left[0], &right[0], &src[0], n)
	return n
}

func finiteBulk(x []float64) int {
	n := groups(len(x))
	if n == 0 {
		return 0
	}
	return finiteAVX2(&x[0], n)
}
