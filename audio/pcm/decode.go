package pcm

import (
	"encoding/binary"
	"fmt"
	"math"
)

// Decode sets dst[i] to the value of the i-th sample in src, full scale 1.0.
// The whole container counts: bits below the valid ones, which ought to be 0,
// are neither lost nor rounded.
//
// It panics unless len(src) = len(dst)*e.Bytes and e passes [Encoding.Check].
func Decode(dst []float64, src []byte, e Encoding) {
	if err := e.Check(); err != nil {
		panic("pcm: " + err.Error())
	}
	if len(src) != len(dst)*e.Bytes {
		panic(fmt.Sprintf("pcm: %d bytes for %d samples of %d", len(src), len(dst), e.Bytes))
	}
	n := decodeBulk(dst, src, e)
	decodeGeneric(dst[n:], src[n*e.Bytes:], e)
}

func decodeGeneric(dst []float64, src []byte, e Encoding) {
	switch {
	case e.Float && e.Bytes == 8:
		decodeFloat64(dst, src)
	case e.Float:
		decodeFloat32(dst, src)
	case e.Bytes == 1:
		decode8(dst, src)
	case e.Bytes == 2:
		decode16(dst, src)
	case e.Bytes == 3:
		decode24(dst, src)
	default:
		decode32(dst, src)
	}
}

func decode8(dst []float64, src []byte) {
	for i, b := range src[:len(dst)] {
		dst[i] = float64(int(b)-0x80) * (1. / 0x80)
	}
}

func decode16(dst []float64, src []byte) {
	for i := range dst {
		s := src[2*i : 2*i+2 : 2*i+2]
		dst[i] = float64(int16(binary.LittleEndian.Uint16(s))) * (1. / (1 << 15))
	}
}

// decode24 puts each sample at the top of 32 bits, which extends its sign. Inlined,
// its index would go through memory.
//
//go:noinline
func decode24(dst []float64, src []byte) {
	for i := range dst {
		s := src[3*i : 3*i+3 : 3*i+3]
		top := uint32(s[0])<<8 | uint32(s[1])<<16 | uint32(s[2])<<24
		dst[i] = float64(int32(top)) * (1. / (1 << 31))
	}
}

func decode32(dst []float64, src []byte) {
	for i := range dst {
		s := src[4*i : 4*i+4 : 4*i+4]
		dst[i] = float64(int32(binary.LittleEndian.Uint32(s))) * (1. / (1 << 31))
	}
}

func decodeFloat32(dst []float64, src []byte) {
	for i := range dst {
		s := src[4*i : 4*i+4 : 4*i+4]
		dst[i] = float64(math.Float32frombits(binary.LittleEndian.Uint32(s)))
	}
}

func decodeFloat64(dst []float64, src []byte) {
	for i := range dst {
		s := src[8*i : 8*i+8 : 8*i+8]
		dst[i] = math.Float64frombits(binary.LittleEndian.Uint64(s))
	}
}

// FirstNonFinite is the index of the first NaN or infinity in x, -1 if none.
func FirstNonFinite(x []float64) int {
	n := finiteBulk(x)
	for i, v := range x[n:] {
		if v-v != 0 { // NaN for both
			return n + i
		}
	}
	return -1
}
