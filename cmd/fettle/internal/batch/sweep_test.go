package batch

import (
	"os"
	"path/filepath"
	"slices"
	"testing"

	"fettle/audio"
	"fettle/audio/pcm"
)

// TestSweep: what a killed run left of these outputs goes, all else stays.
func TestSweep(t *testing.T) {
	outputs := map[string]bool{"a.wav": true, "take1": true, ".hidden.wav": true, "b.12": true}
	gone := []string{
		".a.wav1234567890123456789", ".a.wav1234567890123", ".take11234567890123456", "..hidden.wav12345678901234567", ".b.12123456789012345",
	}
	stays := []string{
		"a.wav", ".a.wav", ".a.wav1", ".a.wav20261201", ".a.wav123456789012x", "a.wav1234567890123456789", ".c.wav1234567890123456789",
		".take1", ".hidden.wav", "..hidden.wav", ".1234567890123456789", "1234567890123456789", ".", ".a.wav12345678901234567890123",
	}
	for _, file := range gone {
		if !isTemporaryOf(file, outputs) {
			t.Errorf("%q would be left", file)
		}
	}
	for _, file := range stays {
		if isTemporaryOf(file, outputs) {
			t.Errorf("%q would be removed", file)
		}
	}
}

// TestSweepKnowsTheWriter: what the writer of recordings calls its files is what is
// swept away.
func TestSweepKnowsTheWriter(t *testing.T) {
	folder := t.TempDir()
	for _, output := range []string{"a.wav", "take1", "\xe9 b.wave"} {
		w, err := audio.Create(filepath.Join(folder, output), audio.Spec{Rate: 8000, Channels: 1, Encoding: pcm.Encoding{Bytes: 2, Bits: 16}, Frames: 1})
		mustDo(t, err)
		p := &Plan{Options: Options{Out: folder}, Jobs: []*Job{{Input: Input{Rel: output}, Output: filepath.Join(folder, output)}}}
		entries, err := os.ReadDir(folder)
		mustDo(t, err)
		if left := p.leftovers(); len(entries) != 1 || !slices.Equal(left, []string{filepath.Join(folder, entries[0].Name())}) {
			t.Errorf("%q: the writer made %v, of which %q would be swept away", output, entries, left)
		}
		if temp := filepath.Ext(output) != "" && !isTemporary(entries[0].Name()); temp {
			t.Errorf("%q: verify would not tell of %s", output, entries[0].Name())
		}
		mustDo(t, w.Abort())
	}
}
