//go:build large

package audio

import (
	"bytes"
	"encoding/binary"
	"os/exec"
	"path/filepath"
	"testing"

	"fettle/audio/container"
	"fettle/audio/pcm"
)

// TestRealSize writes and reads more than 4 GiB, which takes a minute and the
// space on the disk. Run it with
//
//	go test -tags large -run TestRealSize -v ./audio
func TestRealSize(t *testing.T) {
	const block, blocks = 1 << 16, 11_000 // of 6 channels of 8 bits: 4.03 GiB
	spec := Spec{Rate: 48000, Channels: 6, Encoding: pcm.Encoding{Bytes: 1, Bits: 8}, Frames: block * blocks, Carriage: carryArchive(t, archived[3:])}
	path := filepath.Join(t.TempDir(), "a.wav")
	w := mustCreate(t, path, spec)
	samples := fixtureSamples(6*block+blocks, 8)
	for i := range blocks {
		if err := w.WriteFrames(samples[i : i+6*block]); err != nil {
			t.Fatal(err)
		}
	}
	if err := w.Commit(); err != nil {
		t.Fatal(err)
	}
	r := mustOpen(t, path)
	t.Logf("%s of %d bytes, chunks %v", r.Layout().Form, r.Size(), r.Layout().Chunks)
	if r.Layout().Form != container.RF64 || r.Frames() != spec.Frames || len(r.Warnings()) != 0 {
		t.Errorf("%s, %d frames, warnings %q", r.Layout().Form, r.Frames(), r.Warnings())
	}
	got := make([]float64, 6*block)
	for i := range blocks {
		if n, err := r.ReadFrames(got); n != block || err != nil {
			t.Fatal(n, err)
		}
		mustEqual(t, got, samples[i:i+6*block])
	}
	if sum, err := r.SHA256(); err != nil || sum != w.SHA256() {
		t.Errorf("hash %s, written %s, %v", sum, w.SHA256(), err)
	}
	out, err := exec.Command(python(t), "-c", `
import soundfile, sys
with soundfile.SoundFile(sys.argv[1]) as f:
    f.seek(-1, soundfile.SEEK_END)
    sys.stdout.buffer.write(f.read(1).astype("<f8").tobytes())
`, path).Output()
	if err != nil {
		t.Fatal(err)
	}
	last := make([]float64, 6)
	if err := binary.Read(bytes.NewReader(out), binary.LittleEndian, last); err != nil {
		t.Fatal(err)
	}
	mustEqual(t, last, got[len(got)-6:])
}
