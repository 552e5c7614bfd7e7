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
		for i, c := range codes {
			dst[i] = byte(c<<shift) ^ 0x80
		}
	case 2:
		for i, c := range codes {
			binary.LittleEndian.PutUint16(dst[2*i:2*i+2:2*i+2], uint16(c<<shift))
		}
	case 3:
		pack24(dst, codes, shift)
	default:
		for i, c := range codes {
			binary.LittleEndian.PutUint32(dst[4*i:4*i+4:4*i+4], uint32(c<<shift))
		}
	}
}

func pack24(dst []byte, codes []int32, shift uint) {
	for i, c := range codes {
		c <<= shift
		d := dst[3*i : 3*i+3 : 3*i+3]
		d[0], d[1], d[2] = byte(c), byte(c>>8), byte(c>>16)
	}
}

func (q *Quantiser) encodeFloat32(dst []byte, src []float64) {
	for i, x := range src {
		f := float32(x)
		if f-f != 0 {
			q.refuse(q.frame+int64(i/q.channels), i%q.channels, x)
		}
		binary.LittleEndian.PutUint32(dst[4*i:4*i+4:4*i+4], math.Float32bits(f))
	}
}

func (q *Quantiser) encodeFloat64(dst []byte, src []float64) {
	for i, x := range src {
		if x-x != 0 {
			q.refuse(q.frame+int64(i/q.channels), i%q.channels, x)
		}
		binary.LittleEndian.PutUint64(dst[8*i:8*i+8:8*i+8], math.Float64bits(x))
	}
}
