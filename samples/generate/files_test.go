package main

import (
	"bytes"
	"fmt"
	"io/fs"
	"math"
	"os"
	"path/filepath"
	"regexp"
	"slices"
	"strings"
	"testing"
)

// The committed files are what the generator writes today, byte for byte. A
// compiler that fuses multiply and add (not the one for amd64 by default) may
// round a sample the other way; then this says where.
func TestRegeneratesCommittedFiles(t *testing.T) {
	dir := t.TempDir()
	if err := generate(dir); err != nil {
		t.Fatal(err)
	}
	for _, s := range scenes {
		got, errGot := os.ReadFile(filepath.Join(dir, s.path))
		want, errWant := os.ReadFile(filepath.Join(recordings, s.path))
		if errGot != nil || errWant != nil {
			t.Fatal(errGot, errWant)
		}
		if !bytes.Equal(got, want) {
			t.Errorf("%s: %d bytes, committed %d; first difference at byte %d", s.path, len(got), len(want), firstDifference(got, want))
		}
	}
}

func firstDifference(a, b []byte) int {
	n := min(len(a), len(b))
	for i := range n {
		if a[i] != b[i] {
			return i
		}
	}
	return n
}

// The folder holds the files of the scenes and nothing else, at most 2 MB.
func TestFolder(t *testing.T) {
	var want, got []string
	for _, s := range scenes {
		want = append(want, s.path)
	}
	var size int64
	root := os.DirFS(recordings)
	err := fs.WalkDir(root, ".", func(path string, d fs.DirEntry, err error) error {
		if err != nil || d.IsDir() {
			return err
		}
		info, err := d.Info()
		if err != nil {
			return err
		}
		got, size = append(got, path), size+info.Size()
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	slices.Sort(want)
	if !slices.Equal(got, want) {
		t.Errorf("files %q, want %q", got, want)
	}
	t.Logf("%d bytes, allowed 2000000", size)
	if size > 2_000_000 {
		t.Errorf("%d bytes, allowed 2000000", size)
	}
}

// Headers, as an independent decoder reads them, say what the scenes say; and
// the peaks leave room for a filter that turns phase.
func TestFormatAndPeak(t *testing.T) {
	for _, s := range scenes {
		d := decode(t, s)
		if d.rate != s.rate || d.bits != s.bits || len(d.channels) != len(s.channels) || len(d.channels[0]) != s.frames {
			t.Errorf("%s: %d Hz, %d bits, %d channels, %d frames; want %d, %d, %d, %d", s.path,
				d.rate, d.bits, len(d.channels), len(d.channels[0]), s.rate, s.bits, len(s.channels), s.frames)
		}
		var peak float64
		for _, x := range d.channels {
			peak = max(peak, -slices.Min(x), slices.Max(x))
		}
		level := 20 * math.Log10(peak)
		t.Logf("%s: peak %.2f dBFS, allowed -9 to -4", s.path, level)
		if !(level >= -9 && level <= -4) {
			t.Errorf("%s: peak %.2f dBFS, want -9 to -4", s.path, level)
		}
	}
}

// The table in the README has one row a file, with format, faults and onsets.
func TestReadmeTable(t *testing.T) {
	text, err := os.ReadFile("../README.md")
	if err != nil {
		t.Fatal(err)
	}
	for _, s := range scenes {
		row := regexp.MustCompile(`(?m)^\| ` + regexp.QuoteMeta("`"+s.path+"`") + ` .*$`).FindString(string(text))
		cells := []string{fmt.Sprintf("| %d kHz | %d | %d | %.1f |", s.rate/1000, len(s.channels), s.bits, float64(s.frames)/float64(s.rate))}
		for _, ch := range s.channels {
			cells = append(cells, ch.faults()...)
		}
		for _, o := range s.onsets() {
			cells = append(cells, fmt.Sprintf("%s %d", o.what, o.frame))
		}
		for _, cell := range cells {
			if !strings.Contains(row, cell) {
				t.Errorf("README row %q does not hold %q", row, cell)
			}
		}
	}
}

// faults words the faults of a channel as the README does.
func (ch channel) faults() []string {
	var list []string
	for name, level := range map[string]float64{"rumble": ch.rumble, "hum": ch.hum, "hiss": ch.hiss, "water": ch.water} {
		if level != 0 {
			list = append(list, fmt.Sprintf("%s %g", name, level))
		}
	}
	if ch.dc != 0 {
		list = append(list, fmt.Sprintf("offset %g %%", 100*ch.dc))
	}
	return list
}
