package container

import (
	"bytes"
	"encoding/binary"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
)

// bext is the payload as EBU Tech 3285 v2 lays it out in its table, built field
// by field; version 0 and 1 have zeros where later ones have fields.
func bext(order binary.ByteOrder, time uint64, version uint16, umid byte, loudness [5]uint16, history string) []byte {
	var b bytes.Buffer
	text := func(s string, n int) { b.WriteString(s + strings.Repeat("\x00", n-len(s))) }
	text("a quarry, after rain", 256) // Description
	text("recorder 3", 32)            // Originator
	text("REC0000123", 32)            // OriginatorReference
	text("2031-05-06", 10)            // OriginationDate
	text("07:08:09", 8)               // OriginationTime
	for _, v := range []any{uint32(time), uint32(time >> 32), version} {
		if err := binary.Write(&b, order, v); err != nil {
			panic(err)
		}
	}
	b.Write(bytes.Repeat([]byte{umid}, 64))
	if err := binary.Write(&b, order, loudness); err != nil {
		panic(err)
	}
	b.Write(make([]byte, 180)) // Reserved
	b.WriteString(history)
	return b.Bytes()
}

const midday = 12 * 3600 * 192000 // needs more than 32 bits

var (
	stated    = [5]uint16{0xF727, 0x04FD, 1, 2, 3} // the first two as EBU Tech 3285 v2 rounds -22.645 and 12.765
	notAtAll  = [5]uint16{0x7FFF, 0x7FFF, 0x7FFF, 0x7FFF, 0x7FFF}
	none      [5]uint16
	wasRow    = "A=ANALOGUE,M=mono,T=tape machine\r\n"
	isRow     = "A=PCM,F=48000,W=16,M=stereo,T=low cut; no delay\r\n"
	stereo16  = Format{Channels: 2, Rate: 48000, Bytes: 2, ValidBits: 16}
	toldOf    = "low cut, no delay"
	unchanged = Change{Format: stereo16, Frames: 4}
)

// TestBext: what is written, byte for byte, and what is said of it.
func TestBext(t *testing.T) {
	le := binary.LittleEndian
	treated, stretch, named := unchanged, unchanged, unchanged
	treated.Samples, treated.Text = true, toldOf
	stretch.Samples, stretch.Text, stretch.From, stretch.Frames = true, toldOf, 2, 1
	named.Text = toldOf
	tests := []struct {
		name   string
		change Change
		was    []byte
		is     []byte // nil: as it was
		say    string
	}{
		{"untouched", unchanged, bext(le, midday, 2, 7, stated, wasRow), nil, ""},
		{"only named", named, bext(le, midday, 2, 7, stated, wasRow), bext(le, midday, 2, 7, stated, wasRow+isRow), "coding history extended"},
		{"version 0", treated, bext(le, midday, 0, 0, none, wasRow), bext(le, midday, 0, 0, none, wasRow+isRow), "coding history extended"},
		{"version 1", treated, bext(le, midday, 1, 7, none, wasRow), bext(le, midday, 1, 7, none, wasRow+isRow), "coding history extended; its UMID is the original's"},
		{"version 1, no UMID", treated, bext(le, midday, 1, 0, none, wasRow), bext(le, midday, 1, 0, none, wasRow+isRow), "coding history extended"},
		{"version 2", treated, bext(le, midday, 2, 7, stated, wasRow), bext(le, midday, 2, 7, notAtAll, wasRow+isRow), "loudness not stated any more; coding history extended; its UMID is the original's"},
		{"stretch", stretch, bext(le, midday, 0, 0, none, ""), bext(le, midday+2, 0, 0, none, isRow), "time reference moved by 2 frames; coding history extended"},
		{"stretch over the low word", stretch, bext(le, 1<<32-1, 0, 0, none, ""), bext(le, 1<<32+1, 0, 0, none, isRow), "time reference moved by 2 frames; coding history extended"},
		{"odd size", treated, bext(le, 0, 0, 0, none, "x\r\n"), bext(le, 0, 0, 0, none, "x\r\n"+isRow), "coding history extended"},
		{"no history", treated, bext(le, 0, 0, 0, none, ""), bext(le, 0, 0, 0, none, isRow), "coding history extended"},
		{"no end of row", treated, bext(le, 0, 0, 0, none, "A=PCM"), bext(le, 0, 0, 0, none, "A=PCM\r\n"+isRow), "coding history extended"},
		{"half an end", treated, bext(le, 0, 0, 0, none, "A=PCM\r"), bext(le, 0, 0, 0, none, "A=PCM\r\n"+isRow), "coding history extended"},
		{"only a line feed", treated, bext(le, 0, 0, 0, none, "A=PCM\n"), bext(le, 0, 0, 0, none, "A=PCM\n"+isRow), "coding history extended"},
		{"zeros behind", treated, bext(le, 0, 0, 0, none, wasRow+"\x00\x00\x00"), bext(le, 0, 0, 0, none, wasRow+isRow), "coding history extended"},
		{"only zeros", treated, bext(le, 0, 0, 0, none, "\x00\x00"), bext(le, 0, 0, 0, none, isRow), "coding history extended"},
		{"more behind a zero", treated, bext(le, 0, 0, 0, none, "A=PCM\x00more\x00"), bext(le, 0, 0, 0, none, "A=PCM\r\n"+isRow+"\x00more"), "coding history extended"},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			want := test.is
			if want == nil {
				want = test.was
			}
			c, got := carried(t, riff(chunk("bext", test.was), stereo(), chunk("data", samples(16))), test.change)
			b := got[0]
			if b.id != "bext" || !bytes.Equal(b.payload, want) {
				t.Errorf("%s (-want +got):\n%s", b.id, cmp.Diff(want, b.payload))
			}
			list := c.Corrected
			if test.is == nil {
				list = c.Kept
			}
			if d := cmp.Diff([]Note{{"bext", test.say}}, list); d != "" {
				t.Errorf("notes (-want +got):\n%s", d)
			}
		})
	}
}

// TestBextTooShort: what its fields would be is not known, so that it stays as
// it is; a time that is false does not.
func TestBextTooShort(t *testing.T) {
	file := riff(chunk("bext", samples(601)), stereo(), chunk("data", samples(16)))
	c, got := carried(t, file, unchanged)
	if len(got) != 1 || !bytes.Equal(got[0].payload, samples(601)) || len(c.Kept) != 1 || c.Kept[0].Why != "601 bytes are too few for its fields, not corrected" {
		t.Errorf("%+v, kept %v", got, c.Kept)
	}
	stretch := unchanged
	stretch.Frames = 3
	if c, got = carried(t, file, stretch); len(got) != 0 || len(c.Dropped) != 1 {
		t.Errorf("%+v, dropped %v", got, c.Dropped)
	}
}

// TestCodingRow reads the row as EBU R 98 (1999) defines it: fields with an
// equals sign, between commas, the text last, and the end of a line.
func TestCodingRow(t *testing.T) {
	tests := []struct {
		f    Format
		text string
		want map[string]string
	}{
		{stereo16, "a, b", map[string]string{"A": "PCM", "F": "48000", "W": "16", "M": "stereo", "T": "a; b"}},
		{Format{Channels: 1, Rate: 8000, Bytes: 3, ValidBits: 20}, "n=1\r\nA=PCM", map[string]string{"A": "PCM", "F": "8000", "W": "20", "M": "mono", "T": "n=1  A=PCM"}},
		{Format{Channels: 6, Rate: 96000, Bytes: 4, ValidBits: 32, Float: true}, "70 Hz à l'œil\x00\x7f", map[string]string{"A": "PCM", "F": "96000", "W": "32", "T": "IEEE float; 70 Hz ? l'?il ?"}},
	}
	for _, test := range tests {
		row, ended := strings.CutSuffix(codingRow(test.f, test.text), "\r\n")
		if !ended || strings.ContainsAny(row, "\r\n") {
			t.Errorf("%q is no row", row)
		}
		got := map[string]string{}
		for _, field := range strings.Split(row, ",") {
			key, value, ok := strings.Cut(field, "=")
			if !ok {
				t.Errorf("%q: %q is no field", row, field)
			}
			got[key] = value
		}
		if d := cmp.Diff(test.want, got); d != "" {
			t.Errorf("%q (-want +got):\n%s", row, d)
		}
	}
}
