package batch

import (
	"bufio"
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"strings"
)

// Listed is one line of a list of recordings and the chains they are to go
// through.
type Listed struct {
	Recording, Chain string // paths
	Line             int
}

// ReadList reads a CSV file with the columns recording and chain, in any order
// and beside any others. Paths are relative to the file's folder.
func ReadList(path string) ([]Listed, error) {
	f, err := os.Open(path)
	if err != nil {
		return nil, fmt.Errorf("the list %s: cannot be read: %w; check its name and permissions", path, cause(err))
	}
	defer f.Close()
	in := csv.NewReader(withoutMark(f))
	in.FieldsPerRecord = 0 // as many as the first line has
	header, err := in.Read()
	if err != nil {
		return nil, badList(path, err)
	}
	recording, chain := column(header, "recording"), column(header, "chain")
	if recording < 0 || chain < 0 {
		return nil, fmt.Errorf("the list %s: line 1 must name the columns recording and chain, not %q", path, header)
	}
	var out []Listed
	for {
		row, err := in.Read()
		if errors.Is(err, io.EOF) {
			return out, nil
		}
		if err != nil {
			return nil, badList(path, err)
		}
		line, _ := in.FieldPos(0)
		if row[recording] == "" || row[chain] == "" {
			return nil, fmt.Errorf("the list %s: line %d names no recording or no chain; give both", path, line)
		}
		out = append(out, Listed{beside(path, row[recording]), beside(path, row[chain]), line})
	}
}

func badList(path string, err error) error {
	if errors.Is(err, io.EOF) {
		err = errors.New("it is empty")
	}
	return fmt.Errorf("the list %s: %w; it must be comma-separated, with the columns recording and chain", path, err)
}

// withoutMark skips the byte order mark that some programs put before text.
func withoutMark(r io.Reader) io.Reader {
	in := bufio.NewReader(r)
	if start, _ := in.Peek(3); string(start) == "\ufeff" {
		in.Discard(3)
	}
	return in
}

func column(header []string, name string) int {
	for i, h := range header {
		if strings.EqualFold(strings.TrimSpace(h), name) {
			return i
		}
	}
	return -1
}

func beside(list, path string) string {
	if filepath.IsAbs(path) {
		return path
	}
	return filepath.Join(filepath.Dir(list), path)
}

// rooted makes a path begin at the root, where links stay as they are.
func rooted(path string) string {
	if abs, err := filepath.Abs(path); err == nil {
		return abs
	}
	return path
}

// inputs are the recordings of a list, with the paths they have below the list's
// folder; one that lies elsewhere goes by its name alone.
func inputs(list string, listed []Listed) []Input {
	var out []Input
	for _, l := range listed {
		rel, err := filepath.Rel(rooted(filepath.Dir(list)), rooted(l.Recording))
		if err != nil || !filepath.IsLocal(rel) {
			rel = filepath.Base(l.Recording)
		}
		out = append(out, Input{l.Recording, rel})
	}
	return out
}
