package container

import (
	"bytes"
	"encoding/binary"
	"errors"
	"io"
	"math"
	"strings"
	"testing"
)

var stereo24 = Format{Channels: 2, Rate: 96000, Bytes: 3, ValidBits: 24}

func mustOutline(t testing.TB, p Plan) *Outline {
	t.Helper()
	o, err := p.Outline()
	if err != nil {
		t.Fatal(err)
	}
	return o
}

// written is the file that an outline makes, its samples 80h each byte.
func written(t testing.TB, o *Outline) []byte {
	t.Helper()
	var b bytes.Buffer
	if err := o.WriteHead(&b); err != nil {
		t.Fatal(err)
	}
	b.Write(bytes.Repeat([]byte{0x80}, int(o.data)))
	if err := o.WriteTail(&b); err != nil {
		t.Fatal(err)
	}
	if int64(b.Len()) != o.Size() {
		t.Fatalf("%d bytes, the outline says %d", b.Len(), o.Size())
	}
	return b.Bytes()
}

// TestOutlineBytes compares with files laid out by hand: the same mono file of
// three 8-bit frames as RIFF, and as RF64 and BW64 with ds64 in the place of JUNK.
func TestOutlineBytes(t *testing.T) {
	mono8 := Format{Channels: 1, Rate: 8000, Bytes: 1, ValidBits: 8}
	head := chunk("fmt ", fmtPayload(fields{TagPCM, 1, 8000, 8000, 1, 8}))
	data := []byte{0x80, 0x80, 0x80, 0}
	rest := func(size uint32) []byte { return append(append(head, sized("data", size, nil)...), data...) }
	tests := []struct {
		plan Plan
		want []byte
	}{
		{Plan{}, append(append(append([]byte("RIFF"), 76, 0, 0, 0), "WAVEJUNK\x1C\x00\x00\x00"+strings.Repeat("\x00", 28)...), rest(3)...)},
		{Plan{Limit: 84}, append(append(append([]byte("RIFF"), 76, 0, 0, 0), "WAVEJUNK\x1C\x00\x00\x00"+strings.Repeat("\x00", 28)...), rest(3)...)},
		{Plan{Limit: 83}, rf64(ds64(76, 3, 3), rest(unknownSize))},
		{Plan{Limit: 83, Carriage: &Carriage{chna: true, head: []part{{id: "fmt "}}}}, append([]byte("BW64"), rf64(ds64(76, 3, 0), rest(unknownSize))[4:]...)},
		{Plan{Carriage: &Carriage{bw64: true, head: []part{{id: "fmt "}}}}, append([]byte("BW64"), rf64(ds64(76, 3, 0), rest(unknownSize))[4:]...)},
	}
	for _, test := range tests {
		test.plan.Format, test.plan.Frames = mono8, 3
		if got := written(t, mustOutline(t, test.plan)); !bytes.Equal(got, test.want) {
			t.Errorf("limit %d:\n% x\nwant\n% x", test.plan.Limit, got, test.want)
		}
	}
}

// TestRIFFLimit: the largest file that RIFF can tell of is RIFF, the next RF64,
// whatever limit beyond is asked for.
func TestRIFFLimit(t *testing.T) {
	// 4 GiB - 2 of form size, less 108 bytes of header behind the first 8, in
	// frames of 6 bytes.
	const most = (1<<32 - 2 - 108) / 6
	for _, limit := range []int64{0, -1, 1 << 33, math.MaxInt64} {
		for frames, want := range map[int64]Form{most: RIFF, most + 1: RF64} {
			o := mustOutline(t, Plan{Format: stereo24, Frames: frames, Limit: limit})
			if o.Form() != want || o.Size() != 116+6*frames {
				t.Errorf("%d frames, limit %d: %s of %d bytes, want %s of %d", frames, limit, o.Form(), o.Size(), want, 116+6*frames)
			}
		}
	}
}

// TestLongFilesParse: headers of files too long to be written here are read as
// themselves, with fact and the number of frames.
func TestLongFilesParse(t *testing.T) {
	float := Format{Float: true, Channels: 1, Rate: 48000, Bytes: 4, ValidBits: 32}
	for _, frames := range []int64{1<<30 - 30, 1 << 30, 1<<32 - 1, 1 << 32, 1 << 40, math.MaxInt64 / 8} {
		o := mustOutline(t, Plan{Format: float, Frames: frames})
		var head bytes.Buffer
		if err := o.WriteHead(&head); err != nil {
			t.Fatal(err)
		}
		l, err := Parse(sparse{o.Size(), []piece{{0, head.Bytes()}}}, o.Size())
		if err != nil {
			t.Fatal(err)
		}
		checkWarnings(t, l.Warnings)
		if l.Frames() != frames || l.Form != o.Form() || (l.Form == RIFF) != (frames < 1<<30-20) {
			t.Errorf("%s of %d frames, want %s of %d", l.Form, l.Frames(), o.Form(), frames)
		}
		at := bytes.Index(head.Bytes(), []byte("fact")) + 8
		if got := binary.LittleEndian.Uint32(head.Bytes()[at:]); int64(got) != min(frames, 1<<32-1) {
			t.Errorf("fact says %d of %d frames", got, frames)
		}
	}
}

// TestLongChunkIsCarried: a chunk over 4 GiB gets a row in the table.
func TestLongChunkIsCarried(t *testing.T) {
	const long = 1 << 33
	head := rf64(ds64(0, 6, 1, longSize{"axml", long}), chunk("fmt ", fmtPayload(fields{TagPCM, 2, 96000, 576000, 6, 24})), unknown("data", samples(6)), unknown("axml", nil))
	size := int64(len(head)) + long
	r := sparse{size, []piece{{0, head}}}
	l, err := Parse(r, size)
	if err != nil {
		t.Fatal(err)
	}
	c, err := Carry(r, l, Change{Format: stereo24, Frames: 1})
	if err != nil {
		t.Fatal(err)
	}
	o := mustOutline(t, Plan{Format: stereo24, Frames: 1, Carriage: c})
	var b headBuffer
	if err := o.WriteHead(&b); err != nil {
		t.Fatal(err)
	}
	again, err := Parse(sparse{o.Size(), []piece{{0, b.b}, {int64(len(b.b)) + 6, unknown("axml", nil)}}}, o.Size())
	if err != nil {
		t.Fatal(err)
	}
	if last := again.Chunks[len(again.Chunks)-1]; last.ID != "axml" || last.Size != long || again.Form != RF64 || len(again.Warnings) != 0 {
		t.Errorf("%s, last chunk %+v, warnings %q", again.Form, last, again.Warnings)
	}
}

// headBuffer takes a head and not, if something goes wrong, gigabytes.
type headBuffer struct{ b []byte }

func (h *headBuffer) Write(p []byte) (int, error) {
	if len(h.b) > 1<<20 {
		return 0, errFull
	}
	h.b = append(h.b, p...)
	return len(p), nil
}

// errWriter fails after n bytes.
type errWriter struct{ n int }

var errFull = errors.New("full")

func (w *errWriter) Write(b []byte) (int, error) {
	if w.n -= len(b); w.n < 0 {
		return 0, errFull
	}
	return len(b), nil
}

// TestWritingFails: at any byte, and when the original fails or has shrunk.
func TestWritingFails(t *testing.T) {
	original := riff(chunk("iXML", samples(100_001)), stereo(), chunk("data", samples(8)), chunk("LIST", samples(100_001)))
	l := mustParse(t, original)
	plan := func(r io.ReaderAt) *Outline {
		c, err := Carry(r, l, Change{Format: l.Format, Frames: 2})
		if err != nil {
			t.Fatal(err)
		}
		return mustOutline(t, Plan{Format: l.Format, Frames: 2, Carriage: c})
	}
	o := plan(bytes.NewReader(original))
	for _, n := range []int{0, 11, 12, 50_000, 100_000} {
		if err := o.WriteHead(&errWriter{n}); !errors.Is(err, errFull) {
			t.Errorf("after %d bytes: %v", n, err)
		}
		if err := o.WriteTail(&errWriter{n}); !errors.Is(err, errFull) {
			t.Errorf("after %d bytes: %v", n, err)
		}
	}
	if o = plan(&shrinking{Reader: bytes.NewReader(original), end: 1000}); !errors.Is(o.WriteHead(io.Discard), io.ErrUnexpectedEOF) {
		t.Error("a chunk that shrinks is written")
	}
	cause := errors.New("disk on fire")
	if o = plan(&shrinking{Reader: bytes.NewReader(original), end: 1000, err: cause}); !errors.Is(o.WriteHead(io.Discard), cause) {
		t.Error("a failed read is not told")
	}
}

// shrinking ends early once the labels of a table have been read.
type shrinking struct {
	*bytes.Reader
	end int64
	err error
}

func (s *shrinking) ReadAt(p []byte, at int64) (int, error) {
	if len(p) > 4 && at+int64(len(p)) > s.end {
		if s.err == nil {
			return 0, io.EOF
		}
		return 0, s.err
	}
	return s.Reader.ReadAt(p, at)
}
