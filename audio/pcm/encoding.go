package pcm

import (
	"fmt"
	"strings"
)

// Encoding is how one sample is stored.
type Encoding struct {
	Float bool // IEEE 754, little-endian; otherwise linear PCM
	Bytes int  // of the container: PCM 1 to 4, float 4 or 8
	Bits  int  // valid: PCM 4 to 8*Bytes, left-justified; float 8*Bytes
}

// named are the encodings that have a name of their own, in order of size.
var named = []struct {
	name string
	e    Encoding
}{
	{"pcm8", Encoding{Bytes: 1, Bits: 8}},
	{"pcm16", Encoding{Bytes: 2, Bits: 16}},
	{"pcm24", Encoding{Bytes: 3, Bits: 24}},
	{"pcm32", Encoding{Bytes: 4, Bits: 32}},
	{"float32", Encoding{Float: true, Bytes: 4, Bits: 32}},
	{"float64", Encoding{Float: true, Bytes: 8, Bits: 64}},
}

// ParseEncoding understands pcm8, pcm16, pcm24, pcm32, float32 and float64. The
// error for anything else lists them.
func ParseEncoding(name string) (Encoding, error) {
	names := make([]string, len(named))
	for i, n := range named {
		if n.name == name {
			return n.e, nil
		}
		names[i] = n.name
	}
	return Encoding{}, fmt.Errorf("no sample format is called %q; use one of %s", name, strings.Join(names, ", "))
}

// String gives the usual name: "24-bit PCM", "20-bit PCM in 24", "32-bit float".
func (e Encoding) String() string {
	switch {
	case e.Float:
		return fmt.Sprintf("%d-bit float", e.Bits)
	case e.Bits != 8*e.Bytes:
		return fmt.Sprintf("%d-bit PCM in %d", e.Bits, 8*e.Bytes)
	}
	return fmt.Sprintf("%d-bit PCM", e.Bits)
}

// Check returns an error unless the fields are in the ranges stated at them.
func (e Encoding) Check() error {
	ok := e.Bytes >= 1 && e.Bytes <= 4 && e.Bits >= 4 && e.Bits <= 8*e.Bytes
	if e.Float {
		ok = (e.Bytes == 4 || e.Bytes == 8) && e.Bits == 8*e.Bytes
	}
	if !ok {
		return fmt.Errorf("samples of %d bits in %d bytes (float: %t) are not supported; use PCM of 4 to 32 bits or float of 32 or 64", e.Bits, e.Bytes, e.Float)
	}
	return nil
}
