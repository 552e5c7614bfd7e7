package main

import (
	"encoding/binary"
	"math"
)

// wav is the bytes of a WAV file as RIFF and the WAVE format lay them out
// (IBM and Microsoft 1991, "Multimedia Programming Interface and Data
// Specifications 1.0"), with every field free to be wrong.
type wav struct {
	tag, channels, rate, bits int
	data                      []byte
	claimed                   int // size of data in its header, if not 0
}

func (w wav) bytes() []byte {
	frame := w.channels * w.bits / 8
	claimed := len(w.data)
	if w.claimed != 0 {
		claimed = w.claimed
	}
	out := []byte("RIFF")
	out = u32(out, 36+claimed)
	out = append(out, "WAVEfmt "...)
	out = u32(out, 16)
	out = u16(u16(out, w.tag), w.channels)
	out = u32(u32(out, w.rate), w.rate*frame)
	out = u16(u16(out, frame), w.bits)
	out = append(out, "data"...)
	return append(u32(out, claimed), w.data...)
}

func u16(b []byte, x int) []byte { return binary.LittleEndian.AppendUint16(b, uint16(x)) }
func u32(b []byte, x int) []byte { return binary.LittleEndian.AppendUint32(b, uint32(x)) }

// floats is 32-bit float data.
func floats(x ...float64) []byte {
	var out []byte
	for _, v := range x {
		out = u32(out, int(math.Float32bits(float32(v))))
	}
	return out
}
