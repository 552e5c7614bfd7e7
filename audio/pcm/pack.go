package pcm

import (
	"encoding/binary"
	"math"
)

// pack stores codes, left-justified in their containers.
func pack(dst []byte, codes []int32, e Encoding) {
	shift := uint(8*e.Bytes - e.Bits)
	switch e.Bytes {
	case 1:
		pack8(dst, codes, shift)
	case 2:
		pack16(dst, codes, shift)
	case 3:
		pack24(dst, codes, shift)
	default:
		pack32(dst, codes, shift)
	}
}

// Masks like the one here tell the compiler that shifts are smaller than words.
func pack8(dst []byte, codes []int32, shift uint) {
	for i, c := range codes {
		dst[i] = byte(c<<(shift&31)) ^ 0x80
	}
}

func pack16(dst []byte, codes []int32, shift uint) {
	for _, c := range codes {
		binary.LittleEndian.PutUint16(dst, uint16(c<<(shift&31)))
		dst = dst[2:]
	}
}

// Inlined, its index would go through memory.
//
//go:noinline
func pack24(dst []byte, codes []int32, shift uint) {
	for i, c := range codes {
		c <<= shift & 31
		d := dst[3*i : 3*i+3 : 3*i+3]
		d[0], d[1], d[2] = byte(c), byte(c>>8), byte(c>>16)
	}
}

func pack32(dst []byte, codes []int32, shift uint) {
	for _, c := range codes {
		binary.LittleEndian.PutUint32(dst, uint32(c<<(shift&31)))
		dst = dst[4:]
	}
}

func (q *Quantiser) encodeFloat32(dst []byte, src []float64, at int) {
	for i, x := range src {
		f := float32(x)
		if f-f != 0 {
			q.refuse(at+i, x)
		}
		binary.LittleEndian.PutUint32(dst[4*i:4*i+4:4*i+4], math.Float32bits(f))
	}
}

func (q *Quantiser) encodeFloat64(dst []byte, src []float64, at int) {
	for i, x := range src {
		if x-x != 0 {
			q.refuse(at+i, x)
		}
		binary.LittleEndian.PutUint64(dst[8*i:8*i+8:8*i+8], math.Float64bits(x))
	}
}
