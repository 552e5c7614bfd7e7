package container

import (
	"bytes"
	"encoding/binary"
	"errors"
	"io"
	"testing"
)

// fuzzBytes bounds the files of a fuzzer: what can go wrong goes wrong in less.
const fuzzBytes = 1 << 20

// counted notes how often it was read, and how many bytes at the most.
type counted struct {
	*bytes.Reader
	calls, largest int
}

func (c *counted) ReadAt(p []byte, at int64) (int, error) {
	c.calls, c.largest = c.calls+1, max(c.largest, len(p))
	return c.Reader.ReadAt(p, at)
}

// fuzzSeeds are files of every form, sound and damaged.
func fuzzSeeds() [][]byte {
	big := binary.BigEndian
	return [][]byte{
		archive(),
		riff(stereo(), chunk("data", samples(8))),
		riff(chunk("JUNK", samples(5)), chunk("fmt ", extensible(pcm16(2), 16, 3, subFormat(TagPCM))), sized("data", 0xFFFFFFFF, samples(10))),
		riff(stereo(), sized("data", 0, samples(13))),
		riff(stereo(), sized("data", 0, nil), chunk("LIST", samples(6))),
		riff(stereo(), sized("data", 5, samples(5)), chunk("LIST", samples(6))),
		riff(chunk("bext", bext(binary.LittleEndian, midday, 2, 7, stated, "A=PCM\x00x\x00")), stereo(), chunk("data", samples(8)), sized("LIST", 99, []byte("adtllabl"))),
		rf64(ds64(80, 8, 2), stereo(), unknown("data", samples(8))),
		rf64(ds64(106, 9, 2, longSize{"iXML", 5}, longSize{"LIST", 1 << 40}), stereo(), unknown("data", samples(9)), []byte{0}, unknown("iXML", samples(5)), []byte{0}),
		append([]byte("BW64"), rf64(stereo(), unknown("data", samples(9)), chunk("chna", samples(44)))[4:]...),
		[]byte("RF64\xFF\xFF\xFF\xFFWAVEds64"),
		rifx(bigChunk("fmt ", fieldsIn(big, pcm16(2))), bigChunk("cue ", fieldsIn(big, uint32(9), make([]uint32, 7))), bigChunk("data", samples(8)), bigChunk("LIST", fieldsIn(big, "INFO", "INAM", uint32(9), "dawn"))),
		{},
	}
}

// FuzzParse: any bytes give a layout that keeps within them, or an Error of a
// known kind at a byte within them; no buffer is larger than a fmt chunk may be,
// the chunk table is bounded, and so is the number of reads: for every chunk one
// and, where its end is in doubt, two more, one when data are looked at that say
// they are none, one for every row of ds64, and a few for the rest.
func FuzzParse(f *testing.F) {
	for _, seed := range fuzzSeeds() {
		f.Add(seed)
	}
	f.Fuzz(func(t *testing.T, b []byte) {
		if len(b) > fuzzBytes {
			return
		}
		r := &counted{Reader: bytes.NewReader(b)}
		l, err := Parse(r, int64(len(b)))
		if r.largest > fmtMax || r.largest > len(b) {
			t.Errorf("a buffer of %d bytes for a file of %d", r.largest, len(b))
		}
		if r.calls > 5*maxChunks+10 {
			t.Errorf("%d reads of a file of %d bytes", r.calls, len(b))
		}
		if err == nil {
			checkWithin(t, l, int64(len(b)))
			if len(l.Chunks) > maxChunks {
				t.Errorf("%d chunks", len(l.Chunks))
			}
			return
		}
		var e *Error
		if !errors.As(err, &e) || e.Offset < 0 || e.Offset > int64(len(b)) {
			t.Fatalf("error %v", err)
		}
		if !errors.Is(err, ErrMalformed) && !errors.Is(err, ErrUnsupported) {
			t.Errorf("error of no kind: %v", err)
		}
	})
}

// FuzzCarry: whatever Parse has laid out can be written again with its chunks.
// The output is read without a warning, has the same frames and exactly what was
// said to be kept or corrected; written once more from there, as from a RIFF
// file without padding, all content is the same. Buffers are no longer than the
// file, or the 64 KiB that copies are made in.
func FuzzCarry(f *testing.F) {
	for _, seed := range fuzzSeeds() {
		f.Add(seed, uint16(0), uint16(0), "")
		f.Add(seed, uint16(1), uint16(1), "low cut, 70 Hz")
	}
	f.Fuzz(func(t *testing.T, b []byte, from, frames uint16, text string) {
		if len(b) > fuzzBytes || len(text) > fuzzBytes {
			return
		}
		r := &counted{Reader: bytes.NewReader(b)}
		l, err := Parse(r, int64(len(b)))
		if err != nil {
			return
		}
		c := Change{Format: l.Format, Frames: l.Frames(), Text: text, Samples: text != ""}
		if stretch := int64(from) + int64(frames); frames > 0 && stretch <= l.Frames() {
			c.From, c.Frames = int64(from), int64(frames)
		}
		first := rewritten(t, r, l, c)
		if r.largest > max(len(b), 1<<16) {
			t.Errorf("a buffer of %d bytes for a file of %d", r.largest, len(b))
		}
		again := rewritten(t, bytes.NewReader(first), mustParse(t, first), Change{Format: c.Format, Frames: c.Frames})
		if !bytes.Equal(again, first) {
			t.Errorf("% x\nand from there\n% x", first, again)
		}
	})
}

// rewritten is the file that comes of a change, with zeros for samples.
func rewritten(t *testing.T, r io.ReaderAt, l *Layout, c Change) []byte {
	t.Helper()
	carriage, err := Carry(r, l, c)
	if err != nil {
		t.Fatal(err)
	}
	o := mustOutline(t, Plan{Format: c.Format, Fmt: l.Fmt, Frames: c.Frames, Carriage: carriage})
	out := written(t, o)
	is := mustParse(t, out)
	checkWithin(t, is, int64(len(out)))
	if is.Frames() != c.Frames || is.Form != o.Form() || !bytes.Equal(is.Fmt, l.Fmt) {
		t.Errorf("%s, %d frames, fmt % x; want %s, %d, % x", is.Form, is.Frames(), is.Fmt, o.Form(), c.Frames, l.Fmt)
	}
	notes := append(carriage.Kept, carriage.Corrected...)
	if got := len(content(t, out)) - 1; got != len(notes) {
		t.Errorf("%d chunks in the output, %d kept or corrected: %v", got, len(notes), notes)
	}
	return out
}
