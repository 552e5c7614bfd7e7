package batch

import (
	"errors"
	"fmt"
	"maps"
	"os"
	"path/filepath"
	"reflect"
	"slices"
	"strings"

	"github.com/google/renameio/v2"
)

// Merged is what Merge found.
type Merged struct {
	Shards   int
	Done     int      // recordings that are done
	Failures Problems // those that failed, in order
}

// Merge makes one record of those of a batch's shards, after it has made sure that
// they are all there, belong to one batch, hold each of its recordings once and,
// unless mixed is set, were made with one kernel. It changes nothing otherwise.
// The shards' records are removed once theirs is on disk.
func Merge(folder string, mixed bool) (*Merged, error) {
	shards, err := readShards(folder)
	if err != nil {
		return nil, err
	}
	whole, err := readRecord(filepath.Join(folder, RecordName))
	if err != nil {
		return nil, err
	}
	// What is in the one record already needs no checking again: a run that was
	// killed may have left some of the shards' records behind.
	if !covers(whole, shards) {
		if err := checkShards(folder, shards, mixed); err != nil {
			return nil, err
		}
	}
	all, err := readPast(folder)
	if err != nil {
		return nil, err
	}
	m := &Merged{Shards: len(shards)}
	for _, e := range sorted(all) {
		switch {
		case !isOf(shards, e):
		case e.Status == StatusDone:
			m.Done++
		default:
			m.Failures = append(m.Failures, fmt.Errorf("%s", e.Error))
		}
	}
	return m, replaceRecords(folder, all, shards)
}

// part is a shard's record: the last entries of each output.
type part struct {
	shard   Shard
	path    string
	entries map[string]*Entry
	batch   string // that it was last run for; "" if it had nothing to do
	count   int    // recordings in the batch
}

func readShards(folder string) ([]*part, error) {
	var shards []*part
	for _, path := range recordsIn(folder) {
		s := &part{path: path}
		pattern := strings.TrimSuffix(RecordName, recordExt) + ".%d-of-%d" + recordExt
		if _, err := fmt.Sscanf(strings.ToLower(filepath.Base(path)), pattern, &s.shard.Index, &s.shard.Count); err != nil {
			continue // the whole record
		}
		entries, err := readEntries(path)
		if err != nil {
			return nil, err
		}
		s.entries = latest(entries)
		if len(entries) > 0 {
			last := entries[len(entries)-1]
			s.batch, s.count = last.Batch, last.BatchCount
		}
		shards = append(shards, s)
	}
	if shards == nil {
		return nil, fmt.Errorf("%s: there are no records of shards, such as %s; name the folder that render --shard wrote to", folder, recordNameOf(Shard{1, 4}))
	}
	return shards, nil
}

// covers tells whether a record holds all that shards did, or what was done since.
func covers(whole map[string]*Entry, shards []*part) bool {
	for _, s := range shards {
		for rel, e := range s.entries {
			w := whole[rel]
			if w == nil || !e.Treated.Before(w.Treated) && !reflect.DeepEqual(e, w) {
				return false
			}
		}
	}
	return true
}

// isOf tells whether an entry is of the batch that shards were last run for.
func isOf(shards []*part, e *Entry) bool {
	return slices.ContainsFunc(shards, func(s *part) bool { return s.batch != "" && s.batch == e.Batch })
}

// checkShards finds all that is wrong at once.
func checkShards(folder string, shards []*part, mixed bool) error {
	c := &check{folder: folder, owner: map[name]Shard{}, kernels: map[string]bool{}}
	count := shards[0].shard.Count
	batches, present := map[string]bool{}, map[int]bool{}
	for _, s := range shards {
		if s.shard.Count != count {
			c.problem("records of %d and of %d shards are mixed; remove those of the batch that is not meant", count, s.shard.Count)
			return c.problems
		}
		present[s.shard.Index] = true
		c.take(s)
		if s.batch != "" {
			batches[s.batch] = true
		}
	}
	for i := 1; i <= count; i++ {
		if !present[i] {
			c.problem("the record of shard %d/%d is missing; run render --shard %[2]d/%[3]d", i, count)
		}
	}
	missing := c.expected - len(c.owner)
	switch {
	case len(batches) > 1:
		c.problem("the shards were run over different recordings, or through different chains; run all of them again over the same ones")
	case missing > 0 && len(present) == count:
		c.problem("%d of %d recordings are in no record; run the shards again to finish them", missing, c.expected)
	}
	if len(c.kernels) > 1 && !mixed {
		c.problem("the shards used different kernels, %s, whose outputs differ by rounding; render with one --kernel, or accept the mix with --mixed-kernels",
			strings.Join(slices.Sorted(maps.Keys(c.kernels)), " and "))
	}
	if c.problems == nil {
		return nil
	}
	return c.problems
}

// check is what shards are found to hold together.
type check struct {
	folder   string
	problems Problems
	owner    map[name]Shard // of an output
	kernels  map[string]bool
	expected int // recordings in the batch
}

func (c *check) problem(format string, args ...any) {
	c.problems = append(c.problems, fmt.Errorf("%s: "+format, append([]any{c.folder}, args...)...))
}

// take enters a shard's part of the batch it was last run for.
func (c *check) take(s *part) {
	c.expected = max(c.expected, s.count)
	for _, e := range sorted(s.entries) {
		if e.Batch != s.batch {
			continue
		}
		if other, ok := c.owner[e.Output]; ok {
			c.problem("%s is in the records of shards %s and %s; remove one of the two and run that shard again", e.Output, other, s.shard)
		}
		c.owner[e.Output] = s.shard
		c.kernels[e.Kernel] = true
	}
}

// sorted gives entries in the order of their outputs.
func sorted(entries map[string]*Entry) []*Entry {
	var out []*Entry
	for _, e := range entries {
		out = append(out, e)
	}
	slices.SortFunc(out, func(a, b *Entry) int { return strings.Compare(string(a.Output), string(b.Output)) })
	return out
}

// replaceRecords writes one record and removes the others.
func replaceRecords(folder string, entries map[string]*Entry, others []*part) error {
	lines, err := encode(sorted(entries))
	if err != nil {
		return err
	}
	path := filepath.Join(folder, RecordName)
	if err := renameio.WriteFile(path, lines, 0o666, renameio.WithTempDir(folder)); err != nil {
		return unwritableRecord(path, err)
	}
	var problems []error
	for _, other := range others {
		if err := os.Remove(other.path); err != nil {
			problems = append(problems, fmt.Errorf("the record %s: is merged but cannot be removed: %w; remove it by hand", other.path, cause(err)))
		}
	}
	return errors.Join(problems...)
}
