package audio

import (
	"bytes"
	"encoding/binary"
	"errors"
	"io"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"fettle/audio/container"
)

type archivedChunk struct {
	id, payload string
	behind      bool // the data
}

// archived are the chunks around the samples of writeArchive, some of odd size.
var archived = []archivedChunk{
	{"bext", "a quarry, after rain" + strings.Repeat("\x00", 602-20) + "A=ANALOGUE,M=mono,T=tape\r\n", false},
	{"iXML", "<?xml version=\"1.0\"?><BWFXML><SCENE>12</SCENE></BWFXML>", false},
	{"zzzz", strings.Repeat("odd", 100_001), false}, // longer than any buffer
	{"cue ", "\x01\x00\x00\x00" + "\x01\x00\x00\x00\x05\x00\x00\x00data\x00\x00\x00\x00\x00\x00\x00\x00\x05\x00\x00\x00", true},
	{"LIST", "adtllabl\x07\x00\x00\x00\x01\x00\x00\x00on\x00\x00", true},
	{"yyyy", strings.Repeat("odd", 100_001), true},
	{"LIST", "INFOINAM\x05\x00\x00\x00dawn\x00\x00", true},
}

// writeArchive writes 101 mono frames of 24 bits, 303 bytes, among chunks.
func writeArchive(t testing.TB, path string, chunks []archivedChunk) string {
	t.Helper()
	var head, tail []byte
	for _, c := range chunks {
		list := &head
		if c.behind {
			list = &tail
		}
		*list = append(binary.LittleEndian.AppendUint32(append(*list, c.id...), uint32(len(c.payload))), c.payload...)
		*list = append(*list, make([]byte, len(c.payload)%2)...)
	}
	head = append(head, "fmt \x10\x00\x00\x00\x01\x00\x01\x00\x80\xBB\x00\x00\x80\x32\x02\x00\x03\x00\x18\x00"+"data\x2F\x01\x00\x00"...)
	for _, x := range fixtureSamples(101, 24) {
		v := int32(x * (1 << 23))
		head = append(head, byte(v), byte(v>>8), byte(v>>16))
	}
	body := slices.Concat([]byte("WAVE"), head, []byte{0}, tail)
	file := append(binary.LittleEndian.AppendUint32([]byte("RIFF"), uint32(len(body))), body...)
	if err := os.WriteFile(path, file, 0o644); err != nil {
		t.Fatal(err)
	}
	return path
}

// TestChunksAreCarried: into a file of another format, as the same bytes in the
// same order, but for bext, whose coding history says what was done. One
// Carriage serves several outputs, and the hash is that of the whole file.
func TestChunksAreCarried(t *testing.T) {
	r := mustOpen(t, writeArchive(t, filepath.Join(t.TempDir(), "a.wav"), archived))
	spec := float32s(1, r.Frames())
	change := container.Change{Format: spec.Format(), Frames: r.Frames(), Samples: true, Text: "low cut, 70 Hz"}
	var err error
	if spec.Carriage, err = r.Carry(change); err != nil {
		t.Fatal(err)
	}
	if c := spec.Carriage; len(c.Kept) != 6 || len(c.Corrected) != 1 || len(c.Dropped) != 0 {
		t.Errorf("kept %v, corrected %v, dropped %v", c.Kept, c.Corrected, c.Dropped)
	}
	for range 2 {
		path := filepath.Join(t.TempDir(), "b.wav")
		if sum := writeAll(t, path, spec, fixtureSamples(101, 24)); sum != fileHash(t, path) {
			t.Errorf("hash %s, want %s", sum, fileHash(t, path))
		}
		out := mustOpen(t, path)
		if len(out.Warnings()) != 0 {
			t.Errorf("warnings %q", out.Warnings())
		}
		mustEqual(t, readAll(t, out, 10), fixtureSamples(101, 24))
		outline, err := spec.Outline()
		if err != nil || outline.Size() != out.Size() {
			t.Errorf("%d bytes, announced %d, %v", out.Size(), outline.Size(), err)
		}
		checkArchived(t, path, out.Layout(), "A=PCM,F=48000,W=32,M=mono,T=IEEE float; low cut; 70 Hz\r\n")
	}
}

// checkArchived wants the chunks of writeArchive, with a row more in bext.
func checkArchived(t *testing.T, path string, l *container.Layout, row string) {
	t.Helper()
	file, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	at := 0
	for _, c := range l.Chunks {
		if at == len(archived) || c.ID != archived[at].id {
			continue
		}
		want := archived[at].payload
		if c.ID == "bext" {
			want += row
		}
		if got := file[c.Offset : c.Offset+c.Size]; !bytes.Equal(got, []byte(want)) || archived[at].behind != (c.Offset > l.Data.Offset) {
			t.Errorf("chunk %s at byte %d: %d bytes, want %d", c.ID, c.Offset, len(got), len(want))
		}
		at++
	}
	if at != len(archived) {
		t.Errorf("the chunk %s is missing", archived[at].id)
	}
}

// TestCarryingFails: an original that has become shorter fails the output, which
// leaves nothing behind, and the error names the original.
func TestCarryingFails(t *testing.T) {
	for name, left := range map[string]int64{"before the data": 5000, "behind the data": 305_000} {
		t.Run(name, func(t *testing.T) {
			folder := t.TempDir()
			path := writeArchive(t, filepath.Join(t.TempDir(), "a.wav"), archived)
			r := mustOpen(t, path)
			spec := pcm16(1, 101)
			var err error
			if spec.Carriage, err = r.Carry(container.Change{Format: spec.Format(), Frames: 101}); err != nil {
				t.Fatal(err)
			}
			if err := os.Truncate(path, left); err != nil {
				t.Fatal(err)
			}
			w, err := Create(filepath.Join(folder, "b.wav"), spec)
			if err == nil {
				err = errors.Join(w.WriteFrames(ramp(101)), w.Commit())
			}
			mustFail(t, err, path, "the file ends here")
			if !errors.Is(err, io.ErrUnexpectedEOF) {
				t.Errorf("error %v", err)
			}
			mustBeEmpty(t, folder)
		})
	}
}

func TestSeekFrame(t *testing.T) {
	path := filepath.Join(t.TempDir(), "a.wav")
	x := fixtureSamples(2*long, 16)
	writeAll(t, path, pcm16(2, long), x)
	r := mustOpen(t, path)
	for _, frame := range []int64{long - 1, 0, 40_000, long, 1} {
		if err := r.SeekFrame(frame); err != nil {
			t.Fatal(err)
		}
		mustEqual(t, readAll(t, r, 999), x[2*frame:])
	}
	for _, frame := range []int64{-1, long + 1} {
		mustFail(t, r.SeekFrame(frame), path, "is none of its 98321")
	}
	if sum, err := r.SHA256(); err != nil || sum != fileHash(t, path) {
		t.Errorf("hash %s, %v", sum, err)
	}
}
