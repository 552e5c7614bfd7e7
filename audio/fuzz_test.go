package audio

import (
	"crypto/sha256"
	"encoding/hex"
	"io"
	"math"
	"os"
	"path/filepath"
	"runtime"
	"testing"
)

// openBytes is the most that opening and reading a recording may allocate,
// whatever its size and whatever it says: one buffer of bufferBytes, and a chunk
// table with its warnings, which is bounded.
const openBytes = 4 << 20

// FuzzOpen: any file can be opened and read to its end, or is refused; twice the
// same frames, as many as are announced, and the hash is that of its bytes.
func FuzzOpen(f *testing.F) {
	path := filepath.Join(f.TempDir(), "fuzzed.wav")
	seeds, err := filepath.Glob("testdata/*.wav")
	if err != nil || len(seeds) == 0 {
		f.Fatalf("%d files in testdata, %v", len(seeds), err)
	}
	for _, seed := range append(seeds, writeArchive(f, path, archived)) {
		b, err := os.ReadFile(seed)
		if err != nil {
			f.Fatal(err)
		}
		f.Add(b)
	}
	f.Fuzz(func(t *testing.T, b []byte) {
		if len(b) > 1<<20 {
			return
		}
		if err := os.WriteFile(path, b, 0o644); err != nil {
			t.Fatal(err)
		}
		var before, after runtime.MemStats
		runtime.ReadMemStats(&before)
		r, err := Open(path)
		if err == nil {
			defer r.Close()
			// Frames may be wide: what the caller makes room for does not count.
			dst := make([]float64, max(1, 4096/r.Format().NumChannels)*r.Format().NumChannels)
			checkFuzzed(t, r, b, dst)
			before.TotalAlloc += uint64(8 * len(dst))
		}
		runtime.ReadMemStats(&after)
		if n := after.TotalAlloc - before.TotalAlloc; n > openBytes {
			t.Errorf("%d bytes are allocated for a file of %d", n, len(b))
		}
	})
}

// checkFuzzed reads a recording twice through dst.
func checkFuzzed(t *testing.T, r *Recording, b []byte, dst []float64) {
	t.Helper()
	read := func() (frames int64, sum uint64, failed error) {
		for {
			n, err := r.ReadFrames(dst)
			if err == io.EOF {
				return frames, sum, nil
			}
			if err != nil {
				return frames, sum, err
			}
			frames += int64(n)
			for _, x := range dst[:n*r.Format().NumChannels] {
				if x-x != 0 {
					t.Errorf("a sample is %v", x)
				}
				sum = 31*sum + math.Float64bits(x)
			}
		}
	}
	frames, first, err := read()
	if err == nil && frames != r.Frames() {
		t.Errorf("%d frames, announced %d", frames, r.Frames())
	}
	if err := r.Rewind(); err != nil {
		t.Error(err)
	}
	if again, second, err2 := read(); again != frames || first != second || (err == nil) != (err2 == nil) {
		t.Errorf("%d frames, then %d; %v, then %v", frames, again, err, err2)
	}
	sum := sha256.Sum256(b)
	if got, err := r.SHA256(); err != nil || got != hex.EncodeToString(sum[:]) {
		t.Errorf("hash %s, %v", got, err)
	}
}
