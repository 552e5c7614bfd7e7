package container

import (
	"bytes"
	"encoding/binary"
	"math"
	"testing"

	"github.com/google/go-cmp/cmp"
)

// ds64 is the chunk as EBU Tech 3306 lays it out: the sizes of the form and of
// the data, the number of frames, and the table.
func ds64(form, data, frames uint64, rows ...longSize) []byte {
	le := binary.LittleEndian
	b := le.AppendUint64(le.AppendUint64(le.AppendUint64(nil, form), data), frames)
	b = le.AppendUint32(b, uint32(len(rows)))
	for _, row := range rows {
		b = le.AppendUint64(append(b, row.id...), uint64(row.size))
	}
	return chunk("ds64", b)
}

// unknown is a chunk that leaves its size to ds64.
func unknown(id string, payload []byte) []byte { return sized(id, unknownSize, payload) }

// TestLongForms: a 64-bit size holds where the 32-bit one is FFFFFFFFh, and only
// there. The data begin at byte 80.
func TestLongForms(t *testing.T) {
	list := chunk("LIST", samples(6))
	good := func(b []byte) []byte { // the right size of the form
		binary.LittleEndian.PutUint64(b[20:], uint64(len(b)-8))
		return b
	}
	mono24 := chunk("fmt ", fmtPayload(fields{TagPCM, 1, 48000, 144000, 3, 24}))
	tests := []struct {
		name string
		file []byte
		size int64  // of the data
		last string // chunk
		say  []string
	}{
		{"sound", good(rf64(ds64(0, 8, 2), stereo(), unknown("data", samples(8)))), 8, "data", nil},
		{"chunk after the data", good(rf64(ds64(0, 8, 2), stereo(), unknown("data", samples(8)), list)), 8, "LIST", nil},
		{"odd data", good(rf64(ds64(0, 9, 3), mono24, unknown("data", samples(9)), []byte{0}, list)), 9, "LIST", nil},
		{"odd data without pad byte", good(rf64(ds64(0, 9, 3), mono24, unknown("data", samples(9)), list)), 9, "LIST", []string{"no pad byte"}},
		{"32-bit data size", good(rf64(ds64(0, 4, 2), stereo(), chunk("data", samples(8)), list)), 8, "LIST", nil},
		{"row of the table", good(rf64(ds64(0, 8, 2, longSize{"zzzz", 7}, longSize{"iXML", 5}), stereo(), unknown("data", samples(8)), unknown("iXML", samples(5)), []byte{0}, list)), 8, "LIST", nil},
		{"row for a chunk that tells its size", good(rf64(ds64(0, 8, 2, longSize{"iXML", 50}), stereo(), unknown("data", samples(8)), chunk("iXML", samples(5)), list)), 8, "LIST", nil},
		{"32-bit form size", append(binary.LittleEndian.AppendUint32([]byte("RF64"), 88-8), rf64(ds64(7, 8, 2), stereo(), unknown("data", samples(8)))[8:]...), 8, "data", nil},
		{"wrong form size", rf64(ds64(7, 8, 2), stereo(), unknown("data", samples(8))), 8, "data", []string{"byte 20: the header says 7 bytes follow, the file has 80"}},
		{"data size 0, then samples", good(rf64(ds64(0, 0, 0), stereo(), unknown("data", samples(13)))), 12, "data", []string{"says 0 bytes, the file holds 13"}},
		{"data beyond the end", good(rf64(ds64(0, 1<<40, 0), stereo(), unknown("data", samples(13)))), 12, "data", []string{"says 1099511627776 bytes, the file holds 13"}},
		{"impossible data size", good(rf64(ds64(0, math.MaxUint64, 0), stereo(), unknown("data", samples(13)))), 12, "data", []string{"the file holds 13"}},
		{"no ds64", rf64(stereo(), unknown("data", samples(9))), 8, "data", []string{"no ds64 chunk", "says 4294967295 bytes, the file holds 9"}},
		{"ds64 not first", rf64(stereo(), ds64(80, 8, 2), unknown("data", samples(8))), 8, "data", []string{"byte 36: the ds64 chunk does not come first"}},
		{"a second ds64", good(rf64(ds64(0, 8, 2), ds64(0, 4, 1), stereo(), unknown("data", samples(8)))), 8, "data", nil},
		{"ds64 after the data", rf64(stereo(), chunk("data", samples(8)), ds64(80, 4, 1)), 8, "ds64", []string{"no ds64 chunk"}},
		{"ds64 in RIFF", riff(ds64(7, 4, 1), stereo(), chunk("data", samples(8))), 8, "data", nil},
		{"rows that are not there", func() []byte {
			b := good(rf64(ds64(0, 8, 2, longSize{"iXML", 5}), stereo(), unknown("data", samples(8))))
			binary.LittleEndian.PutUint32(b[44:], 1<<31)
			return b
		}(), 8, "data", []string{"byte 44: the ds64 chunk says it has 2147483648 rows; 1 are used"}},
	}
	for _, test := range tests {
		for _, form := range []Form{RF64, BW64} {
			t.Run(test.name+" "+string(form), func(t *testing.T) {
				file := bytes.Clone(test.file)
				if want := Form(file[:4]); want == RF64 {
					copy(file, form)
				} else {
					form = want
				}
				l := mustParse(t, file)
				checkWithin(t, l, int64(len(file)))
				checkWarnings(t, l.Warnings, test.say...)
				if l.Form != form || l.Data.Size != test.size || l.Chunks[len(l.Chunks)-1].ID != test.last {
					t.Errorf("form %s, %d bytes of data, chunks %v; want %s, %d, the last %s", l.Form, l.Data.Size, l.Chunks, form, test.size, test.last)
				}
			})
		}
	}
}

// TestLongFormBeyond4GiB: sizes that need 64 bits, and a chunk behind the data;
// of such sizes FFFFFFFFh, which does not mean unknown there, is the least.
func TestLongFormBeyond4GiB(t *testing.T) {
	mono8 := chunk("fmt ", fmtPayload(fields{TagPCM, 1, 8000, 8000, 1, 8}))
	for _, data := range []int64{1<<32 - 1, 1 << 32, 5 << 30} {
		head := rf64(ds64(0, uint64(data), uint64(data)), mono8, unknown("data", nil))
		tail := chunk("LIST", samples(6))
		behind := int64(len(head)) + data + data%2
		size := behind + int64(len(tail))
		binary.LittleEndian.PutUint64(head[20:], uint64(size-8))
		l, err := Parse(sparse{size, []piece{{0, head}, {behind, tail}}}, size)
		if err != nil {
			t.Fatal(err)
		}
		checkWithin(t, l, size)
		checkWarnings(t, l.Warnings)
		want := []Chunk{{ID: "ds64", Offset: 20, Size: 28}, {ID: "fmt ", Offset: 56, Size: 16}, {ID: "data", Offset: 80, Size: data}, {ID: "LIST", Offset: behind + 8, Size: 6}}
		if d := cmp.Diff(want, l.Chunks); d != "" || l.Frames() != data {
			t.Errorf("%d frames; chunks (-want +got):\n%s", l.Frames(), d)
		}
	}
}
