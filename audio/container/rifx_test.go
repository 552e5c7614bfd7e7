package container

import (
	"bytes"
	"encoding/binary"
	"testing"

	"github.com/google/go-cmp/cmp"
)

// rifx wraps chunks in a big-endian form header.
func rifx(chunks ...[]byte) []byte {
	body := bytes.Join(chunks, nil)
	b := binary.BigEndian.AppendUint32([]byte("RIFX"), uint32(4+len(body)))
	return append(append(b, "WAVE"...), body...)
}

// bigChunk is a chunk with a big-endian size.
func bigChunk(id string, payload []byte) []byte {
	b := append(binary.BigEndian.AppendUint32([]byte(id), uint32(len(payload))), payload...)
	return append(b, make([]byte, len(payload)%2)...)
}

// fieldsIn lays out numbers in a byte order; strings and byte slices have none.
func fieldsIn(order binary.ByteOrder, values ...any) []byte {
	var b bytes.Buffer
	for _, v := range values {
		if s, text := v.(string); text {
			v = []byte(s)
		}
		if err := binary.Write(&b, order, v); err != nil {
			panic(err)
		}
	}
	return b.Bytes()
}

// bothOrders are the fields in big-endian order and in little-endian order.
func bothOrders(values ...any) [2][]byte {
	return [2][]byte{fieldsIn(binary.BigEndian, values...), fieldsIn(binary.LittleEndian, values...)}
}

const bigEndianSaid = "byte 0: a big-endian file (RIFX); an output of it is little-endian (RIFF)"

// TestRIFXFormat: the format is read and its fmt chunk becomes that of a RIFF
// file, the GUID in either order.
func TestRIFXFormat(t *testing.T) {
	guid := subFormat(TagPCM)
	extended := fieldsIn(binary.BigEndian, uint16(TagExtensible), uint16(3), uint32(48000), uint32(432000), uint16(9), uint16(24), uint16(22), uint16(20), uint32(7))
	wanted := extensible(fields{0, 3, 48000, 432000, 9, 24}, 20, 7, guid)
	float := bothOrders(fields{TagFloat, 1, 44100, 4 * 44100, 4, 32}, uint16(0))
	for name, c := range map[string]struct{ is, want []byte }{
		"plain":                   {fieldsIn(binary.BigEndian, pcm16(2)), fmtPayload(pcm16(2))},
		"float":                   {float[0], float[1]},
		"GUID as numbers":         {append(extended, 0, 0, 0, 1, 0, 0, 0, 0x10, 0x80, 0, 0, 0xAA, 0, 0x38, 0x9B, 0x71), wanted},
		"GUID as in RIFF":         {append(extended, guid[:]...), wanted},
		"bytes behind the fields": {append(append(extended, guid[:]...), 1, 2, 3), append(wanted, 1, 2, 3)},
	} {
		t.Run(name, func(t *testing.T) {
			b := rifx(bigChunk("JUNK", samples(5)), bigChunk("fmt ", c.is), bigChunk("data", samples(36)), bigChunk("odd ", samples(3)))
			l := mustParse(t, b)
			checkWithin(t, l, int64(len(b)))
			checkWarnings(t, l.Warnings, bigEndianSaid)
			if l.Form != RIFX || !bytes.Equal(l.Fmt, c.want) || ids(l) != "JUNK fmt  data odd " {
				t.Errorf("%s with %q, fmt % x\nwant % x", l.Form, ids(l), l.Fmt, c.want)
			}
			_, warnings, err := parseFormat(c.want, 0)
			if err != nil || len(warnings) != 0 {
				t.Errorf("%q, %v", warnings, err)
			}
		})
	}
}

// TestRIFXSizesAreBigEndian also where they are wrong.
func TestRIFXSizesAreBigEndian(t *testing.T) {
	fmt := bigChunk("fmt ", fieldsIn(binary.BigEndian, pcm16(2)))
	for _, said := range []string{"\xFF\xFF\xFF\xFF", "\x00\x00\x00\x00", "\x00\x01\x00\x00"} {
		l := mustParse(t, rifx(fmt, []byte("data"+said), samples(10)))
		if l.Data.Size != 8 || len(l.Warnings) != 2 {
			t.Errorf("%x: %d bytes of data, %q", said, l.Data.Size, l.Warnings)
		}
	}
}

// TestRIFXChunks: numbers are turned round where it is known which bytes they
// are; all else stays, and what may be wrong with it is said.
func TestRIFXChunks(t *testing.T) {
	cue := bothOrders(uint32(2), uint32(1), uint32(48), "data", uint32(0), uint32(0), uint32(48), uint32(2), uint32(99), "data", uint32(0), uint32(0), uint32(99))
	smpl := bothOrders([]uint32{1, 2, 20833, 60, 0, 0, 0, 1, 3}, []uint32{1, 0, 48, 99, 0, 7}, "xyz") // a loop and what the sampler likes to keep
	plst := bothOrders(uint32(1), []uint32{1, 1000, 3})
	labl := bothOrders("adtl", "labl", uint32(7), uint32(1), "on\x00", "\x00", "ltxt", uint32(22), uint32(1), uint32(51), "rgn ", uint16(1), uint16(2), uint16(3), uint16(4), "hi", "file", uint32(9), uint32(2), uint32(0), "x")
	info := bothOrders("INFO", "INAM", uint32(5), "dawn\x00", "\x00", "ISFT", uint32(2), "ab")
	broken := bothOrders("INFO", "INAM", uint32(500), "dawn")
	far := bothOrders(uint32(1<<31), uint32(1), uint32(48), "data", uint32(0), uint32(0), uint32(48), "da")
	big, little := binary.BigEndian, binary.LittleEndian
	const turned = "numbers made little-endian"
	tests := []struct {
		id       string
		is, want []byte
		say      string // begins with turned if it is corrected
	}{
		{"cue ", cue[0], cue[1], turned},
		{"cue ", far[0], far[1], turned},
		{"cue ", nil, nil, turned},
		{"smpl", smpl[0], smpl[1], turned},
		{"plst", plst[0], plst[1], turned},
		{"LIST", labl[0], labl[1], turned},
		{"LIST", info[0], info[1], turned},
		{"LIST", broken[0], broken[1], turned},
		{"bext", bext(big, midday, 2, 7, stated, wasRow), bext(little, midday, 2, 7, stated, wasRow), turned},
		{"bext", bext(big, midday, 1, 7, none, ""), bext(little, midday, 1, 7, none, ""), turned},
		{"iXML", samples(5), samples(5), ""},
		{"inst", samples(7), samples(7), ""},
		{"zzzz", samples(8), samples(8), "numbers in it, if any, are big-endian"},
		{"LIST", []byte("wavlslnt"), []byte("wavlslnt"), "numbers in it, if any, are big-endian"},
	}
	for _, test := range tests {
		file := rifx(bigChunk(test.id, test.is), bigChunk("fmt ", fieldsIn(big, pcm16(2))), bigChunk("data", samples(16)))
		c, got := carried(t, file, unchanged)
		if len(got) != 1 || got[0].id != test.id || !bytes.Equal(got[0].payload, test.want) {
			t.Errorf("%s: %s", test.id, cmp.Diff([]read{{test.id, test.want}}, got, cmp.AllowUnexported(read{})))
		}
		list := c.Kept
		if test.say == turned {
			list = c.Corrected
		}
		if len(list) != 1 || list[0].Why != test.say {
			t.Errorf("%s: kept %v, corrected %v", test.id, c.Kept, c.Corrected)
		}
	}
}

// TestRIFXDigests: what tells of the bytes of the samples is false when their
// order changes, and so are peaks, which are numbers.
func TestRIFXDigests(t *testing.T) {
	file := rifx(bigChunk("PEAK", samples(24)), bigChunk("fmt ", fieldsIn(binary.BigEndian, pcm16(2))), bigChunk("data", samples(16)), bigChunk("MD5 ", samples(16)))
	if c, got := carried(t, file, unchanged); len(got) != 0 || len(c.Dropped) != 2 {
		t.Errorf("%v, dropped %v", got, c.Dropped)
	}
}
