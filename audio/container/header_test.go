package container

import (
	"bytes"
	"encoding/binary"
	"math"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

// Where the payload of fmt begins behind the form header, JUNK and its own head.
const fmtAt = 12 + 8 + 28 + 8

// file is a header and the samples it announces.
func file(t testing.TB, f Format, raw []byte, frames int64) []byte {
	t.Helper()
	b, err := Header(f, raw, frames)
	if err != nil {
		t.Fatal(err)
	}
	n := frames * int64(f.FrameBytes())
	return append(b, make([]byte, n+int64(Pad(n)))...)
}

// TestHeaderKinds checks which fmt is made, by its bytes, from the rules quoted
// in the doc comment of Header.
func TestHeaderKinds(t *testing.T) {
	tests := []struct {
		name string
		f    Format
		tag  uint16
		size uint32
		fact bool
		mask uint32
	}{
		{"8-bit mono", Format{Channels: 1, Rate: 8000, Bytes: 1, ValidBits: 8}, TagPCM, 16, false, 0},
		{"16-bit stereo", Format{Channels: 2, Rate: 44100, Bytes: 2, ValidBits: 16}, TagPCM, 16, false, 0},
		{"16-bit stereo with mask", Format{Channels: 2, Rate: 44100, Bytes: 2, ValidBits: 16, ChannelMask: 0x30}, TagExtensible, 40, true, 0x30},
		{"16-bit, 3 channels", Format{Channels: 3, Rate: 44100, Bytes: 2, ValidBits: 16}, TagExtensible, 40, true, 0},
		{"12 bits in 16", Format{Channels: 1, Rate: 44100, Bytes: 2, ValidBits: 12}, TagExtensible, 40, true, frontCentre},
		{"24-bit mono", Format{Channels: 1, Rate: 48000, Bytes: 3, ValidBits: 24}, TagExtensible, 40, true, frontCentre},
		{"32-bit stereo", Format{Channels: 2, Rate: 48000, Bytes: 4, ValidBits: 32}, TagExtensible, 40, true, frontLeft | frontRight},
		{"float32 stereo", Format{Float: true, Channels: 2, Rate: 48000, Bytes: 4, ValidBits: 32}, TagFloat, 18, true, 0},
		{"float64, 4 channels", Format{Float: true, Channels: 4, Rate: 48000, Bytes: 8, ValidBits: 64}, TagExtensible, 40, true, 0},
	}
	le := binary.LittleEndian
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			b := file(t, test.f, nil, 5)
			if tag, size := le.Uint16(b[fmtAt:]), le.Uint32(b[fmtAt-4:]); tag != test.tag || size != test.size {
				t.Errorf("tag %04X in %d bytes, want %04X in %d", tag, size, test.tag, test.size)
			}
			fact := bytes.Index(b, []byte("fact\x04\x00\x00\x00\x05\x00\x00\x00"))
			if want := int(fmtAt + test.size); test.fact != (fact == want) {
				t.Errorf("fact at %d, want one at %d: %t", fact, want, test.fact)
			}
			l := mustParse(t, b)
			checkWarnings(t, l.Warnings)
			if l.Format.ChannelMask != test.mask {
				t.Errorf("mask %X, want %X", l.Format.ChannelMask, test.mask)
			}
		})
	}
}

// TestFloatGUID compares the bytes with those published for the IEEE float
// sub-format, 00000003-0000-0010-8000-00AA00389B71 (Microsoft 2001).
func TestFloatGUID(t *testing.T) {
	b := file(t, Format{Float: true, Channels: 4, Rate: 48000, Bytes: 8, ValidBits: 64}, nil, 1)
	want := []byte{3, 0, 0, 0, 0, 0, 0x10, 0, 0x80, 0, 0, 0xAA, 0, 0x38, 0x9B, 0x71}
	if got := b[fmtAt+24 : fmtAt+40]; !bytes.Equal(got, want) {
		t.Errorf("% x, want % x", got, want)
	}
	if got := guidText([16]byte(want)); got != "00000003-0000-0010-8000-00AA00389B71" {
		t.Errorf("written as %s", got)
	}
}

// TestHeaderParses: any format that is written is read as itself, without a
// warning, its fmt chunk too when that is handed on.
func TestHeaderParses(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		f := Format{Float: rapid.Bool().Draw(t, "float"), Rate: rapid.IntRange(1, math.MaxUint32).Draw(t, "rate")}
		if f.Float {
			f.Bytes = rapid.SampledFrom([]int{4, 8}).Draw(t, "bytes")
			f.ValidBits = 8 * f.Bytes
		} else {
			f.Bytes = rapid.IntRange(1, 4).Draw(t, "bytes")
			f.ValidBits = rapid.IntRange(leastBits, 8*f.Bytes).Draw(t, "bits")
		}
		f.Channels = rapid.IntRange(1, min(math.MaxUint16, maxFrameBytes/f.Bytes)).Draw(t, "channels")
		frames := rapid.Int64Range(1, 4).Draw(t, "frames")
		b, err := Header(f, nil, frames)
		if err != nil {
			t.Fatal(err)
		}
		n := frames * int64(f.FrameBytes())
		b = append(b, make([]byte, n+int64(Pad(n)))...)
		if said := binary.LittleEndian.Uint32(b[4:]); int(said) != len(b)-8 {
			t.Fatalf("the RIFF header says %d bytes follow, there are %d", said, len(b)-8)
		}
		l, err := parse(b)
		if err != nil {
			t.Fatal(err)
		}
		g := l.Format
		g.Tag, g.SubFormat, g.ChannelMask = f.Tag, f.SubFormat, f.ChannelMask
		if g != f || l.Frames() != frames || len(l.Warnings) != 0 {
			t.Fatalf("%+v, %d frames, %q; want %+v, %d frames", l.Format, l.Frames(), l.Warnings, f, frames)
		}
		again, err := Header(f, l.Fmt, frames)
		if err != nil || !bytes.Equal(again, b[:len(again)]) {
			t.Fatalf("with its own fmt chunk: %v\n% x\n% x", err, again, b[:len(again)])
		}
	})
}

func TestHeaderKeepsFmt(t *testing.T) {
	raw := extensible(pcm16(2), 16, 0x600, subFormat(TagPCM))
	raw = append(raw, 1, 2, 3) // an odd tail that nobody knows
	f := Format{Channels: 2, Rate: 48000, Bytes: 2, ValidBits: 16}
	l := mustParse(t, file(t, f, raw, 3))
	if !bytes.Equal(l.Fmt, raw) || l.Format.ChannelMask != 0x600 || l.Frames() != 3 {
		t.Errorf("fmt % x, mask %X, %d frames", l.Fmt, l.Format.ChannelMask, l.Frames())
	}
	checkWarnings(t, l.Warnings)
}

func TestHeaderRefuses(t *testing.T) {
	good := Format{Channels: 2, Rate: 96000, Bytes: 3, ValidBits: 24}
	with := func(change func(*Format)) Format { f := good; change(&f); return f }
	tests := []struct {
		name   string
		f      Format
		raw    []byte
		frames int64
		say    string
	}{
		{"far too long", good, nil, math.MaxInt64, "64-bit sizes"},
		{"too long", good, nil, math.MaxInt64/12 + 1, "64-bit sizes"},
		{"length unknown", good, nil, -1, "length must be known"},
		{"no channels", with(func(f *Format) { f.Channels = 0 }), nil, 1, "0 channels"},
		{"too many channels", with(func(f *Format) { f.Channels = 65536 }), nil, 1, "65536 channels"},
		{"frame too wide", with(func(f *Format) { f.Channels = 21846 }), nil, 1, "at most 65535 bytes"},
		{"no rate", with(func(f *Format) { f.Rate = 0 }), nil, 1, "0 Hz"},
		{"rate too high", with(func(f *Format) { f.Rate = 1 << 32 }), nil, 1, "4294967296 Hz"},
		{"5 bytes", with(func(f *Format) { f.Bytes = 5 }), nil, 1, "in 5 bytes"},
		{"bits over", with(func(f *Format) { f.ValidBits = 25 }), nil, 1, "25 bits"},
		{"half float", with(func(f *Format) { f.Float, f.Bytes, f.ValidBits = true, 2, 16 }), nil, 1, "16 bits"},
		{"fmt too short", good, make([]byte, 3), 1, "3 bytes"},
		{"fmt nonsense", good, make([]byte, 16), 1, "0 channels"},
		{"fmt of another format", good, fmtPayload(pcm16(2)), 1, "when the format changes"},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			b, err := Header(test.f, test.raw, test.frames)
			if err == nil || b != nil || !strings.Contains(err.Error(), test.say) {
				t.Errorf("%d bytes, error %v, want %q", len(b), err, test.say)
			}
		})
	}
}
