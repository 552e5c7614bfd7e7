package container

import (
	"bytes"
	"encoding/binary"
	"strings"
	"testing"
)

// riff wraps chunks in a form header with the right size.
func riff(chunks ...[]byte) []byte {
	body := bytes.Join(chunks, nil)
	b := binary.LittleEndian.AppendUint32([]byte("RIFF"), uint32(4+len(body)))
	return append(append(b, "WAVE"...), body...)
}

// chunk is a whole chunk with its pad byte.
func chunk(id string, payload []byte) []byte { return appendChunk(nil, id, payload) }

// sized is a chunk whose header says `size`, whatever the payload; no pad byte.
func sized(id string, size uint32, payload []byte) []byte {
	return append(binary.LittleEndian.AppendUint32([]byte(id), size), payload...)
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

func mustParse(t *testing.T, b []byte) *Layout {
	t.Helper()
	l, err := parse(b)
	if err != nil {
		t.Fatal(err)
	}
	return l
}

// checkWarnings wants exactly one warning for each of the given fragments, in
// order.
func checkWarnings(t *testing.T, got []string, want ...string) {
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
