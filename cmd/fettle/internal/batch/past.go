package batch

import (
	"bufio"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"syscall"
)

// recordNameOf is the file name of a shard's record.
func recordNameOf(s Shard) string {
	if s.Count == 0 {
		return RecordName
	}
	return fmt.Sprintf("%s.%d-of-%d%s", strings.TrimSuffix(RecordName, recordExt), s.Index, s.Count, recordExt)
}

const recordExt = ".jsonl"

var shardRecord = regexp.MustCompile(`(?i)^treatment\.[0-9]+-of-[0-9]+\.jsonl$`)

func isRecordName(rel string) bool {
	return strings.EqualFold(rel, RecordName) || strings.EqualFold(rel, removedMark) || shardRecord.MatchString(rel)
}

// isTreated tells a folder that fettle wrote to: what is in it has been treated
// already, or was taken out.
func isTreated(folder string) bool {
	return len(recordsIn(folder)) > 0 || holdsRemoved(folder)
}

// recordsIn lists the paths of a folder's records: the whole one first, then
// those of shards by name.
func recordsIn(folder string) []string {
	var whole, shards []string
	entries, _ := os.ReadDir(folder) // one that cannot be read has none to be found
	for _, e := range entries {
		switch path := filepath.Join(folder, e.Name()); {
		case e.Name() == RecordName:
			whole = append(whole, path)
		case shardRecord.MatchString(e.Name()):
			shards = append(shards, path)
		}
	}
	return append(whole, shards...)
}

// readPast gives the last entry of each output in all records of a folder.
func readPast(folder string) (map[string]*Entry, error) {
	past := map[string]*Entry{}
	for _, path := range recordsIn(folder) {
		entries, err := readRecord(path)
		if err != nil {
			return nil, err
		}
		for rel, e := range entries {
			if old := past[rel]; old == nil || !e.Treated.Before(old.Treated) {
				past[rel] = e
			}
		}
	}
	return past, nil
}

// removedFiles are the files that hold what chains took out.
func removedFiles(past map[string]*Entry) map[name]bool {
	out := map[name]bool{}
	for _, e := range past {
		if e.Removed != "" {
			out[e.Removed] = true
		}
	}
	return out
}

// readRecord gives the last entry of each output.
func readRecord(path string) (map[string]*Entry, error) {
	entries, err := readEntries(path)
	return latest(entries), err
}

// latest gives the last entry of each output.
func latest(entries []*Entry) map[string]*Entry {
	out := map[string]*Entry{}
	for _, e := range entries {
		out[filepath.FromSlash(string(e.Output))] = e
	}
	return out
}

// readEntries gives a record's entries in its order; none for a missing record.
// A line that cannot be read is an error, but for a torn last one.
func readEntries(path string) ([]*Entry, error) {
	f, err := os.Open(path)
	if errors.Is(err, fs.ErrNotExist) || errors.Is(err, syscall.ENOTDIR) {
		return nil, nil
	}
	if err != nil {
		return nil, unreadableRecord(path, err)
	}
	defer f.Close()
	if info, err := f.Stat(); err == nil && !info.Mode().IsRegular() {
		return nil, unreadableRecord(path, errors.New("it is no regular file"))
	}
	var out []*Entry
	in := bufio.NewReader(f)
	for n := 1; ; n++ {
		line, err := in.ReadBytes('\n')
		if err == io.EOF {
			return out, nil // what stands here is torn, or nothing
		}
		if err != nil {
			return nil, unreadableRecord(path, err)
		}
		e := new(Entry)
		if err := json.Unmarshal(line, e); err != nil || e.Schema != RecordSchema {
			return nil, fmt.Errorf("the treatment record %s: line %d is none of its kind; move the file away to begin a new one", path, n)
		}
		out = append(out, e)
	}
}
