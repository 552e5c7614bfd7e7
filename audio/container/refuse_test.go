package container

import (
	"bytes"
	"encoding/binary"
	"errors"
	"io"
	"strings"
	"testing"
)

// wide is a fmt chunk of a given tag and width, otherwise consistent.
func wide(tag, width uint16) []byte {
	bytes := (width + 7) / 8
	return chunk("fmt ", fmtPayload(fields{tag, 1, 8000, 8000 * uint32(bytes), bytes, width}))
}

// changed is the usual stereo fmt chunk with some of its fields changed.
func changed(change func(*fields)) []byte {
	f := pcm16(2)
	change(&f)
	return chunk("fmt ", fmtPayload(f))
}

// withID replaces the id of a good file.
func withID(id string) []byte {
	return append([]byte(id), riff(stereo(), chunk("data", samples(8)))[4:]...)
}

func TestRefuses(t *testing.T) {
	data := chunk("data", samples(8))
	ambisonic := [16]byte{1, 0, 0, 0, 0x21, 0x07, 0xD3, 0x11, 0x86, 0x44, 0xC8, 0xC1, 0xCA}
	tests := []struct {
		name   string
		file   []byte
		kind   error
		offset int64
		say    string
	}{
		{"empty", nil, ErrMalformed, 0, "empty"},
		{"one byte", []byte("R"), ErrMalformed, 0, `begins with "R"`},
		{"text", []byte("this is a text file"), ErrMalformed, 0, "not a WAV file"},
		{"AIFF", []byte("FORM\x00\x00\x00\x04AIFF"), ErrMalformed, 0, "AIFF"},
		{"FLAC", []byte("fLaC\x00\x00\x00\x22"), ErrMalformed, 0, "FLAC"},
		{"RIFF sizes in RIFX", withID("RIFX"), ErrMalformed, 12, "fmt chunk of 268435456 bytes"},
		{"ds64 too short", rf64(sized("ds64", 27, samples(27)), stereo(), data), ErrMalformed, 12, "ds64 chunk of 27 bytes, where 28 are needed"},
		{"ds64 cut", rf64(sized("ds64", 28, samples(20))), ErrMalformed, 12, "20 are left"},
		{"form header cut", []byte("RIFF\x04\x00\x00\x00WA"), ErrMalformed, 10, "inside the 12-byte RIFF header"},
		{"AVI", append([]byte("RIFF\x04\x00\x00\x00"), "AVI "...), ErrMalformed, 8, `"AVI "`},
		{"form header only", riff(), ErrMalformed, 12, "no fmt chunk"},
		{"chunk header cut", riff([]byte("fmt \x10")), ErrMalformed, 12, "inside a chunk header"},
		{"zeros", riff(make([]byte, 64)), ErrMalformed, 12, "no chunk where one must begin"},
		{"fmt cut", riff(stereo()[:20]), ErrMalformed, 12, "inside the fmt chunk"},
		{"fmt too short", riff(chunk("fmt ", make([]byte, 14)), data), ErrMalformed, 12, "fmt chunk of 14 bytes"},
		{"fmt too long", riff(chunk("fmt ", make([]byte, 2000)), data), ErrMalformed, 12, "fmt chunk of 2000 bytes"},
		{"no fmt", riff(data), ErrMalformed, 12, "no fmt chunk"},
		{"no data", riff(stereo(), chunk("LIST", samples(4))), ErrMalformed, 48, "no data chunk"},
		{"two fmt", riff(stereo(), stereo(), data), ErrMalformed, 36, "second fmt chunk, the first is at byte 12"},
		{"fmt after data", riff(data, stereo()), ErrMalformed, 28, "fmt chunk stands after the data chunk at byte 12"},
		{"no channels", riff(changed(func(f *fields) { f.channels = 0 }), data), ErrMalformed, 22, "0 channels"},
		{"no rate", riff(changed(func(f *fields) { f.rate = 0 }), data), ErrMalformed, 24, "0 Hz"},
		{"no bits", riff(changed(func(f *fields) { f.width = 0 }), data), ErrMalformed, 34, "0 bits"},
		{"align", riff(changed(func(f *fields) { f.align = 3 }), data), ErrMalformed, 32, "3 bytes a frame"},
		{"align of too wide a frame", riff(changed(func(f *fields) { f.channels, f.align = 40000, 14464 }), data), ErrMalformed, 32, "make 80000"},
		{"24 in 4 without EXTENSIBLE", riff(changed(func(f *fields) { f.width, f.align = 24, 8 }), data), ErrMalformed, 32, "8 bytes a frame"},
		{"A-law", riff(wide(0x0006, 8), data), ErrUnsupported, 20, "A-law (format tag 0006h)"},
		{"mu-law", riff(wide(0x0007, 8), data), ErrUnsupported, 20, "mu-law"},
		{"IMA ADPCM", riff(wide(0x0011, 4), data), ErrUnsupported, 20, "IMA ADPCM"},
		{"Microsoft ADPCM", riff(wide(0x0002, 4), data), ErrUnsupported, 20, "Microsoft ADPCM (format tag 0002h)"},
		{"GSM", riff(wide(0x0031, 0), data), ErrUnsupported, 20, "GSM 06.10"},
		{"A-law, EXTENSIBLE", riff(chunk("fmt ", extensible(fields{0, 2, 8000, 16000, 2, 8}, 8, 3, subFormat(0x0006))), data), ErrUnsupported, 20, "A-law"},
		{"MPEG without bits", riff(wide(0x0055, 0), data), ErrUnsupported, 20, "MPEG layer 3"},
		{"unknown tag", riff(wide(0x7A21, 8), data), ErrUnsupported, 20, "format tag 7A21h"},
		{"PCM 64", riff(wide(TagPCM, 64), data), ErrUnsupported, 34, "64 bits"},
		{"PCM 1", riff(wide(TagPCM, 1), data), ErrUnsupported, 34, "1 bits"},
		{"float 16", riff(wide(TagFloat, 16), data), ErrUnsupported, 34, "float with 16 bits"},
		{"EXTENSIBLE cut", riff(chunk("fmt ", extensible(pcm16(2), 16, 3, subFormat(TagPCM))[:24]), data), ErrMalformed, 20, "24 bytes long, 40 are needed"},
		{"EXTENSIBLE 20 bits", riff(chunk("fmt ", extensible(fields{0, 1, 8000, 24000, 3, 20}, 20, 4, subFormat(TagPCM))), data), ErrMalformed, 34, "no whole number of bytes"},
		{"EXTENSIBLE A-law", riff(chunk("fmt ", extensible(pcm16(2), 16, 3, subFormat(6))), data), ErrUnsupported, 20, "A-law"},
		{"EXTENSIBLE foreign", riff(chunk("fmt ", extensible(pcm16(2), 16, 3, ambisonic)), data), ErrUnsupported, 44, "00000001-0721-11D3-8644-C8C1CA000000"},
		{"no audio at end", riff(stereo(), chunk("data", nil)), ErrMalformed, 36, "no audio"},
		{"no audio, chunks", riff(stereo(), chunk("data", nil), chunk("LIST", samples(6)), chunk("id3 ", samples(3))), ErrMalformed, 36, "no audio"},
		{"no audio, chunk and stray byte", riff(stereo(), chunk("data", nil), chunk("LIST", samples(6)), []byte{1}), ErrMalformed, 36, "no audio"},
		{"less than a frame", riff(stereo(), chunk("data", samples(3))), ErrMalformed, 36, "no audio"},
		{"less than a frame, size 0", riff(stereo(), sized("data", 0, samples(3))), ErrMalformed, 36, "no audio"},
		{"chunk before data too long", riff(stereo(), sized("LIST", 1000, samples(40))), ErrMalformed, 36, `"LIST" says 1000 bytes where 40 are left`},
		{"too many chunks", riff(stereo(), data, bytes.Repeat(chunk("JUNK", nil), maxChunks)), ErrUnsupported, 36 + 16 + 8*(maxChunks-2), "more than 4096 chunks"},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			_, err := parse(test.file)
			var e *Error
			if !errors.As(err, &e) || !errors.Is(err, test.kind) {
				t.Fatalf("error %v, want %v", err, test.kind)
			}
			if e.Offset != test.offset || !strings.Contains(e.Error(), test.say) {
				t.Errorf("%q, want byte %d and %q", err, test.offset, test.say)
			}
			if !strings.Contains(e.Msg, "; ") {
				t.Errorf("%q does not say what to do", err)
			}
		})
	}
}

// TestRefusesEveryTruncation cuts a good file at every byte of its header: it
// is refused, never with a panic, until the first frame is complete.
func TestRefusesEveryTruncation(t *testing.T) {
	whole := riff(chunk("JUNK", samples(5)), stereo(), chunk("data", samples(8)))
	first := len(whole) - 4
	for n := range whole {
		_, err := parse(whole[:n])
		if n < first && !errors.Is(err, ErrMalformed) {
			t.Errorf("%d of %d bytes: %v", n, len(whole), err)
		}
		if n >= first && err != nil {
			t.Errorf("%d of %d bytes hold a frame: %v", n, len(whole), err)
		}
	}
}

// failing reads up to a limit and then fails with its own error.
type failing struct {
	b     []byte
	limit int64
	err   error
}

func (f failing) ReadAt(p []byte, at int64) (int, error) {
	if at+int64(len(p)) <= f.limit {
		return bytes.NewReader(f.b).ReadAt(p, at)
	}
	return int(max(0, f.limit-at)), f.err
}

func TestReadFailureKeepsItsCause(t *testing.T) {
	b := riff(chunk("JUNK", samples(5)), stereo(), chunk("data", nil), chunk("LIST", samples(5)), chunk("id3 ", samples(4)))
	cause := errors.New("disk on fire")
	for limit := int64(0); limit < int64(len(b))-4; limit++ {
		_, err := Parse(failing{b, limit, cause}, int64(len(b)))
		if err == nil || !errors.Is(err, cause) && !errors.Is(err, ErrMalformed) {
			t.Fatalf("failing from byte %d on: %v", limit, err)
		}
		if limit < 60 && !errors.Is(err, cause) {
			t.Errorf("failing from byte %d on: %v, want %v", limit, err, cause)
		}
	}
	_, err := Parse(bytes.NewReader(b[:20]), int64(len(b)))
	if !errors.Is(err, io.ErrUnexpectedEOF) {
		t.Errorf("a file shorter than its size: %v", err)
	}
}

// TestSizesAreNotBelieved sets every 32-bit word of a file to extreme values:
// no panic, and the data always within the file.
func TestSizesAreNotBelieved(t *testing.T) {
	whole := riff(chunk("JUNK", samples(6)), stereo(), chunk("data", samples(16)), chunk("LIST", samples(7)))
	for at := 0; at+4 <= len(whole); at++ {
		for _, v := range []uint32{0, 1, 0x7FFFFFFF, 0x80000000, 0xFFFFFFF7, 0xFFFFFFFE, 0xFFFFFFFF} {
			b := bytes.Clone(whole)
			binary.LittleEndian.PutUint32(b[at:], v)
			if l, err := parse(b); err == nil {
				checkWithin(t, l, int64(len(b)))
			}
		}
	}
}

// checkWithin checks what every layout promises of a file of n bytes.
func checkWithin(t *testing.T, l *Layout, n int64) {
	t.Helper()
	frame := int64(l.Format.FrameBytes())
	if d := l.Data; d.Offset < 12 || d.Size < frame || d.Offset+d.Size > n || d.Size%frame != 0 {
		t.Errorf("data %+v in a file of %d bytes, %d a frame", d, n, frame)
	}
	if l.Frames()*frame != l.Data.Size {
		t.Errorf("%d frames in %d bytes", l.Frames(), l.Data.Size)
	}
	end := int64(12)
	for _, c := range l.Chunks {
		if len(c.ID) != 4 || c.Offset < end+8 || c.Size < 0 || c.Offset+c.Size > n {
			t.Errorf("chunk %+v after byte %d in a file of %d bytes", c, end, n)
		}
		end = c.Offset + c.Size
	}
}
