package pcm

import (
	"strings"
	"testing"
)

func TestEncodingNames(t *testing.T) {
	want := map[string]string{"pcm8": "8-bit PCM", "pcm16": "16-bit PCM", "pcm24": "24-bit PCM", "pcm32": "32-bit PCM", "float32": "32-bit float", "float64": "64-bit float"}
	for name, text := range want {
		e, err := ParseEncoding(name)
		if err != nil || e.String() != text || e.Check() != nil {
			t.Errorf("%s: %v, %v, %v", name, e, err, e.Check())
		}
	}
	if s := (Encoding{Bytes: 3, Bits: 20}).String(); s != "20-bit PCM in 24" {
		t.Errorf("20 in 3 bytes is called %q", s)
	}
	for _, name := range []string{"", "pcm12", "PCM16", "float"} {
		_, err := ParseEncoding(name)
		if err == nil || !strings.Contains(err.Error(), "pcm8, pcm16, pcm24, pcm32, float32, float64") {
			t.Errorf("%q: %v", name, err)
		}
	}
}

func TestEncodingCheck(t *testing.T) {
	for _, e := range []Encoding{{}, {Bytes: 5, Bits: 40}, {Bytes: 2, Bits: 17}, {Bytes: 1, Bits: 3}, {Bytes: 8, Bits: 64},
		{Float: true, Bytes: 2, Bits: 16}, {Float: true, Bytes: 4, Bits: 24}, {Float: true, Bytes: 8, Bits: 32}} {
		if e.Check() == nil {
			t.Errorf("%+v passes", e)
		}
		if _, err := NewQuantiser(e, 1, nil); err == nil {
			t.Errorf("%+v: a quantiser is made", e)
		}
	}
}

func TestQuantiserRefuses(t *testing.T) {
	pcm16, float := Encoding{Bytes: 2, Bits: 16}, Encoding{Float: true, Bytes: 4, Bits: 32}
	d := NewDither([32]byte{}, "a", 0)
	for name, err := range map[string]error{
		"no channels":         second(NewQuantiser(pcm16, 0, nil)),
		"dither for too few":  second(NewQuantiser(pcm16, 2, []*Dither{d})),
		"dither for float":    second(NewQuantiser(float, 1, []*Dither{d})),
		"dither for too many": second(NewQuantiser(pcm16, 1, []*Dither{nil, nil})),
	} {
		if err == nil {
			t.Errorf("%s: no error", name)
		}
	}
	if _, err := NewQuantiser(float, 1, []*Dither{nil}); err != nil {
		t.Errorf("float with an empty entry: %v", err)
	}
}

func second(_ *Quantiser, err error) error { return err }

// TestPanicsOnLengths: lengths that do not belong together are a caller's
// mistake.
func TestPanicsOnLengths(t *testing.T) {
	q := mustQuantiser(t, Encoding{Bytes: 2, Bits: 16}, 2, nil)
	for name, f := range map[string]func(){
		"decode, bytes":    func() { Decode(make([]float64, 2), make([]byte, 3), q.encoding) },
		"decode, encoding": func() { Decode(nil, nil, Encoding{Bytes: 5, Bits: 40}) },
		"encode, bytes":    func() { q.Encode(make([]byte, 3), make([]float64, 2)) },
		"encode, frames":   func() { q.Encode(make([]byte, 6), make([]float64, 3)) },
	} {
		func() {
			defer func() {
				if recover() == nil {
					t.Errorf("%s: no panic", name)
				}
			}()
			f()
		}()
	}
}
