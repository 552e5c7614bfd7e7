package audio

import (
	"bytes"
	"os"
	"path/filepath"
	"testing"

	"fettle/audio/container"
	"fettle/audio/needs"
	"fettle/audio/pcm"
)

// sparseFile is a file of a spec whose samples are zero but for the last frames;
// the file system does not store the zeros.
func sparseFile(t *testing.T, path string, spec Spec, last []byte) {
	t.Helper()
	o, err := spec.Outline()
	if err != nil {
		t.Fatal(err)
	}
	f, err := os.Create(path)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	var tail bytes.Buffer
	if err := o.WriteTail(&tail); err != nil {
		t.Fatal(err)
	}
	if err := o.WriteHead(f); err != nil {
		t.Fatal(err)
	}
	if _, err := f.WriteAt(append(last, tail.Bytes()...), o.Size()-int64(tail.Len()+len(last))); err != nil {
		needs.Missing(t, "this file system has no room for a sparse file of %d bytes: %v", o.Size(), err)
	}
}

// TestBeyond4GiB reads the last frames of a recording of 5 GiB, and finds the
// chunks behind them; as RF64, and as RIFF with a size that is not known.
func TestBeyond4GiB(t *testing.T) {
	const frames = 5<<30/3 + 1 // an odd number of bytes
	spec := Spec{Rate: 48000, Channels: 1, Encoding: pcm.Encoding{Bytes: 3, Bits: 24}, Frames: frames, Carriage: carryArchive(t, archived)}
	path := filepath.Join(t.TempDir(), "a.wav")
	sparseFile(t, path, spec, []byte{1, 2, 3, 4, 5, 6})
	want := []float64{0, 0x030201 / float64(1<<23), 0x060504 / float64(1<<23)}

	r := mustOpen(t, path)
	if l := r.Layout(); l.Form != container.RF64 || r.Frames() != frames || len(r.Warnings()) != 0 {
		t.Errorf("%s, %d frames, warnings %q", l.Form, r.Frames(), r.Warnings())
	}
	checkLast(t, r, want)
	if last := r.Layout().Chunks[len(r.Layout().Chunks)-1]; last.ID != "LIST" || last.Offset+last.Size != r.Size() {
		t.Errorf("the last chunk is %+v", last)
	}

	f, err := os.OpenFile(path, os.O_WRONLY, 0)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	if _, err := f.WriteAt([]byte("RIFF"), 0); err != nil {
		t.Fatal(err)
	}
	if err := f.Truncate(r.Layout().Data.Offset + 3*frames); err != nil {
		t.Fatal(err)
	}
	r = mustOpen(t, path)
	if l := r.Layout(); l.Form != container.RIFF || r.Frames() != frames || len(r.Warnings()) != 2 {
		t.Errorf("%s, %d frames, warnings %q", l.Form, r.Frames(), r.Warnings())
	}
	checkLast(t, r, want)
}

// checkLast compares the last frames of a mono recording.
func checkLast(t *testing.T, r *Recording, want []float64) {
	t.Helper()
	if err := r.SeekFrame(r.Frames() - int64(len(want))); err != nil {
		t.Fatal(err)
	}
	mustEqual(t, readAll(t, r, 2), want)
}
