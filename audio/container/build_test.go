package container

import (
	"bytes"
	"encoding/binary"
	"io"
	"strings"
	"testing"
)

// riff wraps chunks in a form header with the right size.
func riff(chunks ...[]byte) []byte {
	body := bytes.Join(chunks, nil)
	b := binary.LittleEndian.AppendUint32([]byte("RIFF"), uint32(4+len(body)))
	return append(append(b, "WAVE"...), body...)
}

// rf64 wraps chunks in a form header that leaves its size to ds64.
func rf64(chunks ...[]byte) []byte {
	return append([]byte("RF64\xFF\xFF\xFF\xFFWAVE"), bytes.Join(chunks, nil)...)
}

// chunk is a whole chunk with its pad byte.
func chunk(id string, payload []byte) []byte { return appendChunk(nil, id, payload) }

// sized is a chunk whose header says `size`, whatever the payload; no pad byte.
func sized(id string, size uint32, payload []byte) []byte {
	return append(binary.LittleEndian.AppendUint32([]byte(id), size), payload...)
}

// appendChunk adds a whole chunk.
func appendChunk(b []byte, id string, payload []byte) []byte {
	b = append(b, sized(id, uint32(len(payload)), payload)...)
	return append(b, make([]byte, len(payload)%2)...)
}

// fields are the numbers of a fmt chunk, in order.
type fields struct {
	tag, channels uint16
	rate, second  uint32
	align, width  uint16
}

// pcm16 describes 16-bit samples at 48 kHz.
func pcm16(channels uint16) fields {
	return fields{TagPCM, channels, 48000, 48000 * 2 * uint32(channels), 2 * channels, 16}
}

// fmtPayload is a 16-byte fmt, and more if asked.
func fmtPayload(f fields, more ...byte) []byte {
	var b bytes.Buffer
	if err := binary.Write(&b, binary.LittleEndian, f); err != nil {
		panic(err)
	}
	return append(b.Bytes(), more...)
}

// extensible is the payload of an EXTENSIBLE fmt.
func extensible(f fields, valid uint16, mask uint32, guid [16]byte) []byte {
	le := binary.LittleEndian
	f.tag = TagExtensible
	b := le.AppendUint16(fmtPayload(f), 22)
	b = le.AppendUint32(le.AppendUint16(b, valid), mask)
	return append(b, guid[:]...)
}

// stereo is the fmt chunk that most cases use, 4 bytes a frame.
func stereo() []byte { return chunk("fmt ", fmtPayload(pcm16(2))) }

// samples are n bytes that look like no chunk.
func samples(n int) []byte { return bytes.Repeat([]byte{0x80, 0x01, 0xFE, 0x7F}, n/4+1)[:n] }

func parse(b []byte) (*Layout, error) { return Parse(bytes.NewReader(b), int64(len(b))) }

func mustParse(t testing.TB, b []byte) *Layout {
	t.Helper()
	l, err := parse(b)
	if err != nil {
		t.Fatal(err)
	}
	return l
}

// sparse is a long file of zeros but for some pieces.
type sparse struct {
	size   int64
	pieces []piece
}

type piece struct {
	at int64
	b  []byte
}

func (s sparse) ReadAt(p []byte, at int64) (int, error) {
	n := int(min(int64(len(p)), max(0, s.size-at)))
	clear(p[:n])
	for _, piece := range s.pieces {
		if from := piece.at - at; from >= 0 && from < int64(n) {
			copy(p[from:n], piece.b)
		} else if from < 0 && -from < int64(len(piece.b)) {
			copy(p[:n], piece.b[-from:])
		}
	}
	if n < len(p) {
		return n, io.EOF
	}
	return n, nil
}

// checkWarnings wants exactly one warning for each of the given fragments, in
// order.
func checkWarnings(t testing.TB, got []string, want ...string) {
	t.Helper()
	if len(got) != len(want) {
		t.Fatalf("warnings %q, want %d", got, len(want))
	}
	for i := range want {
		if !strings.Contains(got[i], want[i]) {
			t.Errorf("warning %q does not say %q", got[i], want[i])
		}
	}
}
