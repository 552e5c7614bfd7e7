package container

import (
	"bytes"
	"testing"

	"github.com/google/go-cmp/cmp"
)

func TestParsesWhatIsSound(t *testing.T) {
	silence := make([]byte, 393164) // what one recorder's firmware writes before the data
	float := fields{TagFloat, 1, 96000, 4 * 96000, 4, 32}
	tests := []struct {
		name   string
		fmt    []byte
		before []byte
		want   Format
	}{
		{"16-byte fmt", fmtPayload(pcm16(2)), nil, Format{Tag: TagPCM, Channels: 2, Rate: 48000, Bytes: 2, ValidBits: 16}},
		{"18-byte fmt", fmtPayload(pcm16(2), 0, 0), nil, Format{Tag: TagPCM, Channels: 2, Rate: 48000, Bytes: 2, ValidBits: 16}},
		{"float with fact", fmtPayload(float, 0, 0), chunk("fact", make([]byte, 4)), Format{Tag: TagFloat, Float: true, Channels: 1, Rate: 96000, Bytes: 4, ValidBits: 32}},
		{"20 bits in 3 bytes, plain", fmtPayload(fields{TagPCM, 1, 8000, 24000, 3, 20}), nil, Format{Tag: TagPCM, Channels: 1, Rate: 8000, Bytes: 3, ValidBits: 20}},
		{"20 in 24", extensible(fields{0, 2, 48000, 288000, 6, 24}, 20, 3, subFormat(TagPCM)), nil,
			Format{Tag: TagExtensible, Channels: 2, Rate: 48000, Bytes: 3, ValidBits: 20, ChannelMask: 3, SubFormat: subFormat(TagPCM)}},
		{"24 in 32, 5.1", extensible(fields{0, 6, 48000, 48000 * 24, 24, 32}, 24, 0x3F, subFormat(TagPCM)), nil,
			Format{Tag: TagExtensible, Channels: 6, Rate: 48000, Bytes: 4, ValidBits: 24, ChannelMask: 0x3F, SubFormat: subFormat(TagPCM)}},
		{"9 channels, mask 0", extensible(pcm16(9), 16, 0, subFormat(TagPCM)), nil,
			Format{Tag: TagExtensible, Channels: 9, Rate: 48000, Bytes: 2, ValidBits: 16, SubFormat: subFormat(TagPCM)}},
		{"float64 EXTENSIBLE", extensible(fields{0, 1, 48000, 384000, 8, 64}, 64, 4, subFormat(TagFloat)), nil,
			Format{Tag: TagExtensible, Float: true, Channels: 1, Rate: 48000, Bytes: 8, ValidBits: 64, ChannelMask: 4, SubFormat: subFormat(TagFloat)}},
		{"65535 channels of 8 bits", fmtPayload(fields{TagPCM, 65535, 1, 65535, 65535, 8}), nil, Format{Tag: TagPCM, Channels: 65535, Rate: 1, Bytes: 1, ValidBits: 8}},
		{"highest rate", fmtPayload(fields{TagPCM, 1, 1<<32 - 1, 1<<32 - 1, 1, 8}), nil, Format{Tag: TagPCM, Channels: 1, Rate: 1<<32 - 1, Bytes: 1, ValidBits: 8}},
		{"long LIST before data", fmtPayload(pcm16(2)), chunk("LIST", silence), Format{Tag: TagPCM, Channels: 2, Rate: 48000, Bytes: 2, ValidBits: 16}},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			size := 2 * test.want.FrameBytes()
			b := riff(chunk("bext", samples(602)), chunk("fmt ", test.fmt), test.before, chunk("data", samples(size)), chunk("iXML", samples(6)))
			l := mustParse(t, b)
			checkWarnings(t, l.Warnings)
			checkWithin(t, l, int64(len(b)))
			if d := cmp.Diff(test.want, l.Format); d != "" {
				t.Errorf("format (-want +got):\n%s", d)
			}
			if !bytes.Equal(l.Fmt, test.fmt) || l.Frames() != 2 {
				t.Errorf("fmt % x, %d frames", l.Fmt, l.Frames())
			}
		})
	}
}

func TestChunkTable(t *testing.T) {
	l := mustParse(t, riff(chunk("bext", samples(9)), stereo(), chunk("data", samples(8)), chunk("LIST", samples(3)), chunk("odd!", nil)))
	want := []Chunk{
		{ID: "bext", Offset: 20, Size: 9}, {ID: "fmt ", Offset: 38, Size: 16}, {ID: "data", Offset: 62, Size: 8},
		{ID: "LIST", Offset: 78, Size: 3}, {ID: "odd!", Offset: 90},
	}
	if d := cmp.Diff(want, l.Chunks); d != "" {
		t.Errorf("chunks (-want +got):\n%s", d)
	}
	if want := (Extent{62, 8}); l.Data != want {
		t.Errorf("data %+v, want %+v", l.Data, want)
	}
}

// TestTolerates: what is wrong, what is made of it, and what is said. The data
// begin at byte 44 and a frame has 4 bytes unless noted.
func TestTolerates(t *testing.T) {
	mono24 := chunk("fmt ", fmtPayload(fields{TagPCM, 1, 48000, 144000, 3, 24}))
	list := chunk("LIST", samples(4))
	tests := []struct {
		name string
		file []byte
		size int64 // of the data
		say  []string
	}{
		{"data size unknown", riff(stereo(), sized("data", 0xFFFFFFFF, samples(10))), 8, []string{"says 4294967295 bytes, the file holds 10; the 8 bytes"}},
		{"data one byte too long", riff(stereo(), sized("data", 9, samples(8))), 8, []string{"says 9 bytes, the file holds 8"}},
		{"data cut in a frame", riff(stereo(), sized("data", 400, samples(23))), 20, []string{"says 400 bytes, the file holds 23; the 20 bytes to the last whole frame are used (5 frames)"}},
		{"data size 0, then samples", riff(stereo(), sized("data", 0, samples(13))), 12, []string{"says 0 bytes, the file holds 13"}},
		{"no whole number of frames", riff(stereo(), sized("data", 10, samples(10)), list), 8, []string{"says 10 bytes, no whole number of 4-byte frames"}},
		{"zeros after the data", riff(stereo(), chunk("data", samples(8)), make([]byte, 100)), 8, []string{"byte 52: the last 100 bytes of the file are no chunk"}},
		{"rubbish after the data", riff(stereo(), chunk("data", samples(8)), []byte{0xC3}), 8, []string{"byte 52: the last 1 bytes"}},
		{"chunk after the data cut", riff(stereo(), chunk("data", samples(8)), sized("LIST", 99, samples(4))), 8, []string{`"LIST" says 99 bytes, the file ends after 4`}},
		{"two data chunks", riff(stereo(), chunk("data", samples(8)), chunk("data", samples(16))), 8, []string{"byte 52: a second data chunk"}},
		{"no pad byte", riff(mono24, sized("data", 303, samples(303)), list), 303, []string{"byte 347: no pad byte"}},
		{"pad byte not zero", riff(mono24, sized("data", 303, append(samples(303), 'x')), list), 303, nil},
		{"pad counted", riff(mono24, sized("data", 304, append(samples(303), 0)), list), 303, []string{"says 304 bytes"}},
		{"last pad byte missing", riff(mono24, sized("data", 303, samples(303))), 303, nil},
		{"no pad byte before an unknown chunk", riff(mono24, sized("data", 303, samples(303)), chunk("zzzz", samples(4))), 303, []string{"no pad byte"}},
		{"RIFF size 0", append([]byte("RIFF\x00\x00\x00\x00"), riff(stereo(), chunk("data", samples(8)))[8:]...), 8, []string{"says 0 bytes follow, the file has 44"}},
		{"RIFF size without the last pad", append([]byte("RIFF\x53\x01\x00\x00"), riff(mono24, chunk("data", samples(303)))[8:]...), 303, nil},
		{"byte rate", riff(changed(func(f *fields) { f.second = 7 }), chunk("data", samples(8))), 8, []string{"byte 28: fmt says 7 bytes a second"}},
		{"mask of too many", riff(chunk("fmt ", extensible(pcm16(2), 16, 0x3F, subFormat(TagPCM))), chunk("data", samples(8))), 8, []string{"names 6 loudspeakers for 2 channels"}},
		{"mask of too few", riff(chunk("fmt ", extensible(pcm16(2), 16, 4, subFormat(TagPCM))), chunk("data", samples(8))), 8, []string{"names 1 loudspeakers"}},
		{"0 valid bits", riff(chunk("fmt ", extensible(pcm16(2), 0, 3, subFormat(TagPCM))), chunk("data", samples(8))), 8, []string{"0 valid bits"}},
		{"too many valid bits", riff(chunk("fmt ", extensible(pcm16(2), 24, 3, subFormat(TagPCM))), chunk("data", samples(8))), 8, []string{"24 valid bits"}},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			l := mustParse(t, test.file)
			checkWithin(t, l, int64(len(test.file)))
			checkWarnings(t, l.Warnings, test.say...)
			if l.Data.Size != test.size {
				t.Errorf("%d bytes of data, want %d", l.Data.Size, test.size)
			}
		})
	}
}

// TestPadDoesNotHideChunks: whatever was done about the pad byte, the chunk
// behind it is found.
func TestPadDoesNotHideChunks(t *testing.T) {
	for name, pad := range map[string][]byte{"none": nil, "zero": {0}, "space": {' '}, "letter": {'L'}} {
		b := riff(stereo(), sized("JUNK", 5, append(samples(5), pad...)), chunk("data", samples(8)), sized("odd ", 7, append(samples(7), pad...)), chunk("LIST", samples(4)))
		l := mustParse(t, b)
		var ids []string
		for _, c := range l.Chunks {
			ids = append(ids, c.ID)
		}
		if d := cmp.Diff([]string{"fmt ", "JUNK", "data", "odd ", "LIST"}, ids); d != "" {
			t.Errorf("pad %s (-want +got):\n%s", name, d)
		}
	}
}

// TestBeyond4GiB: an unknown size stands for all of a file that is longer than
// any size could tell; a known one does not.
func TestBeyond4GiB(t *testing.T) {
	const size = 44 + 5<<30
	for said, want := range map[uint32]int64{0xFFFFFFFF: 5 << 30, 0xFFFFFFFC: 0xFFFFFFFC} {
		l, err := Parse(sparse{size, []piece{{0, riff(stereo(), sized("data", said, nil))}}}, size)
		if err != nil {
			t.Fatal(err)
		}
		checkWithin(t, l, size)
		if l.Data.Size != want || len(l.Warnings) != 2 {
			t.Errorf("size %X: %d bytes of data, want %d; warnings %q", said, l.Data.Size, want, l.Warnings)
		}
	}
}
