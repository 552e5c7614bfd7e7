package audio

import (
	"math/rand/v2"
	"os"
	"path/filepath"
	"testing"
)

// TestReadBack: a file is as it was sent, or not, wherever it differs, on any number
// of goroutines; how it was sent does not matter.
func TestReadBack(t *testing.T) {
	path := filepath.Join(t.TempDir(), "a")
	r := rand.New(rand.NewPCG(41, 42))
	for _, size := range []int{1, sectionBytes - 1, sectionBytes, 2*sectionBytes + 12345} {
		b := make([]byte, size)
		for i := range b {
			b[i] = byte(r.Uint32())
		}
		var sent sections
		for rest := b; len(rest) > 0; {
			n := min(len(rest), 1+r.IntN(sectionBytes*3/2))
			sent.Write(rest[:n])
			rest = rest[n:]
		}
		back := func(file []byte, workers int) error {
			if err := os.WriteFile(path, file, 0o644); err != nil {
				t.Fatal(err)
			}
			return sent.readBack(path, workers, make([]byte, 1000))
		}
		for workers := 1; workers <= 3; workers++ {
			if err := back(b, workers); err != nil {
				t.Errorf("%d bytes, %d goroutines: %v", size, workers, err)
			}
			for _, at := range []int{0, size / 2, size - 1} {
				b[at] ^= 0x10
				if err := back(b, workers); err != errAltered {
					t.Errorf("%d bytes, %d goroutines, byte %d altered: error %v", size, workers, at, err)
				}
				b[at] ^= 0x10
			}
		}
		for what, file := range map[string][]byte{"shorter": b[:size-1], "longer": append(b, 0)} {
			if err := back(file, 2); err != errAltered {
				t.Errorf("%d bytes, the file is %s: error %v", size, what, err)
			}
		}
		if err := sent.readBack(filepath.Join(path, "absent"), 1, nil); err == nil {
			t.Errorf("%d bytes: read back from nowhere", size)
		}
	}
}
