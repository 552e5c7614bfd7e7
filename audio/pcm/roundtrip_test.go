package pcm

import (
	"bytes"
	"encoding/binary"
	"math"
	"math/rand/v2"
	"testing"
)

// encode runs a fresh quantiser without dither over one channel.
func encode(t *testing.T, e Encoding, src []float64) []byte {
	t.Helper()
	dst := make([]byte, len(src)*e.Bytes)
	if err := mustQuantiser(t, e, 1, nil).Encode(dst, src); err != nil {
		t.Fatal(err)
	}
	return dst
}

func decode(e Encoding, src []byte) []float64 {
	dst := make([]float64, len(src)/e.Bytes)
	Decode(dst, src, e)
	return dst
}

// TestKnownValues writes out the meaning of a few codes: the WAVE rules (8 bits
// unsigned, others signed, little-endian, left-justified) by hand.
func TestKnownValues(t *testing.T) {
	tests := []struct {
		e     Encoding
		bytes []byte
		want  float64
	}{
		{Encoding{Bytes: 1, Bits: 8}, []byte{0}, -1},
		{Encoding{Bytes: 1, Bits: 8}, []byte{128}, 0},
		{Encoding{Bytes: 1, Bits: 8}, []byte{255}, 127. / 128},
		{Encoding{Bytes: 1, Bits: 4}, []byte{0x90}, 1. / 8},
		{Encoding{Bytes: 2, Bits: 16}, []byte{0, 0x80}, -1},
		{Encoding{Bytes: 2, Bits: 16}, []byte{0xFF, 0xFF}, -1. / 32768},
		{Encoding{Bytes: 2, Bits: 16}, []byte{0xFF, 0x7F}, 32767. / 32768},
		{Encoding{Bytes: 2, Bits: 12}, []byte{0x10, 0}, 1. / 2048},
		{Encoding{Bytes: 3, Bits: 24}, []byte{0xFF, 0xFF, 0xFF}, -1. / (1 << 23)},
		{Encoding{Bytes: 3, Bits: 24}, []byte{0, 0, 0x80}, -1},
		{Encoding{Bytes: 3, Bits: 20}, []byte{0x10, 0, 0}, 1. / (1 << 19)},
		{Encoding{Bytes: 4, Bits: 32}, []byte{1, 0, 0, 0}, 1. / (1 << 31)},
		{Encoding{Bytes: 4, Bits: 32}, []byte{0, 0, 0, 0x80}, -1},
		{Encoding{Bytes: 4, Bits: 24}, []byte{0, 1, 0, 0}, 1. / (1 << 23)},
		{Encoding{Float: true, Bytes: 4, Bits: 32}, []byte{0, 0, 0x60, 0x40}, 3.5},
		{Encoding{Float: true, Bytes: 8, Bits: 64}, []byte{0, 0, 0, 0, 0, 0, 0x0C, 0xC0}, -3.5},
	}
	for _, test := range tests {
		if got := decode(test.e, test.bytes)[0]; got != test.want {
			t.Errorf("%v % x: %g, want %g", test.e, test.bytes, got, test.want)
		}
		if got := encode(t, test.e, []float64{test.want}); !bytes.Equal(got, test.bytes) {
			t.Errorf("%v %g: % x, want % x", test.e, test.want, got, test.bytes)
		}
	}
}

// TestEveryCode: every code of up to 16 bits and a sample of the wider ones
// survive decoding and encoding, and are decoded to code/2^(bits-1).
func TestEveryCode(t *testing.T) {
	for _, e := range []Encoding{{Bytes: 1, Bits: 8}, {Bytes: 1, Bits: 4}, {Bytes: 2, Bits: 16}, {Bytes: 2, Bits: 13},
		{Bytes: 3, Bits: 24}, {Bytes: 3, Bits: 20}, {Bytes: 4, Bits: 32}, {Bytes: 4, Bits: 24}, {Bytes: 4, Bits: 16}} {
		t.Run(e.String(), func(t *testing.T) {
			codes := someCodes(e.Bits)
			src := make([]byte, 0, len(codes)*e.Bytes)
			for _, c := range codes {
				src = appendCode(src, e, c)
			}
			x := decode(e, src)
			for i, c := range codes {
				if want := math.Ldexp(float64(c), 1-e.Bits); x[i] != want {
					t.Fatalf("code %d: %g, want %g", c, x[i], want)
				}
			}
			if got := encode(t, e, x); !bytes.Equal(got, src) {
				t.Error("the bytes have changed")
			}
		})
	}
}

// someCodes are all codes of up to 16 bits; of more, the ends, the middle, the
// powers of two and their neighbours, and 100 000 others.
func someCodes(bits int) []int64 {
	least, most := -(int64(1) << (bits - 1)), int64(1)<<(bits-1)-1
	var codes []int64
	if bits <= 16 {
		for c := least; c <= most; c++ {
			codes = append(codes, c)
		}
		return codes
	}
	codes = []int64{least, least + 1, -1, 0, 1, most - 1, most}
	for k := range bits - 1 {
		p := int64(1) << k
		codes = append(codes, p-1, p, -p-1, -p)
	}
	r := rand.New(rand.NewPCG(3, uint64(bits)))
	for range 100_000 {
		codes = append(codes, least+r.Int64N(most-least+1))
	}
	return codes
}

// appendCode is the slow twin of pack.
func appendCode(b []byte, e Encoding, code int64) []byte {
	v := uint64(code) << (8*e.Bytes - e.Bits)
	if e.Bytes == 1 {
		v += 128
	}
	return append(b, binary.LittleEndian.AppendUint64(nil, v)[:e.Bytes]...)
}

func TestFloatBits(t *testing.T) {
	values := []float64{0, math.Copysign(0, -1), 1, -1, 3.7, -1e10, math.SmallestNonzeroFloat32, -3 * math.SmallestNonzeroFloat32,
		math.MaxFloat32, 0x1p-126, 0x1p-130, 1e-20}
	r := rand.New(rand.NewPCG(5, 6))
	for len(values) < 100_000 {
		if f := math.Float32frombits(r.Uint32()); f-f == 0 {
			values = append(values, float64(f))
		}
	}
	var in []byte
	for _, v := range values {
		in = binary.LittleEndian.AppendUint32(in, math.Float32bits(float32(v)))
	}
	e32, e64 := Encoding{Float: true, Bytes: 4, Bits: 32}, Encoding{Float: true, Bytes: 8, Bits: 64}
	if !bytes.Equal(encode(t, e32, decode(e32, in)), in) {
		t.Error("float32 bits have changed")
	}
	in = in[:0]
	for _, v := range append(values, math.MaxFloat64, math.SmallestNonzeroFloat64, 1./3) {
		in = binary.LittleEndian.AppendUint64(in, math.Float64bits(v))
	}
	if !bytes.Equal(encode(t, e64, decode(e64, in)), in) {
		t.Error("float64 bits have changed")
	}
}

func TestFirstNonFinite(t *testing.T) {
	x := []float64{0, math.MaxFloat64, -math.MaxFloat64, 5e-324}
	if i := FirstNonFinite(x); i != -1 {
		t.Errorf("found at %d in finite samples", i)
	}
	for _, v := range []float64{math.NaN(), math.Inf(1), math.Inf(-1)} {
		if i := FirstNonFinite(append(x, v, v)); i != len(x) {
			t.Errorf("%v found at %d, want %d", v, i, len(x))
		}
	}
}
