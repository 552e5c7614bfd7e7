package batch

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"os"
	"path/filepath"
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
	shards, paths, err := readShards(folder)
	if err != nil {
		return nil, err
	}
	if err := checkShards(folder, shards, mixed); err != nil {
		return nil, err
	}
	all, err := readPast(folder)
	if err != nil {
		return nil, err
	}
	m := &Merged{Shards: len(shards)}
	for _, e := range sorted(all) {
		if e.Status == StatusDone {
			m.Done++
		} else {
			m.Failures = append(m.Failures, fmt.Errorf("%s", e.Error))
		}
	}
	return m, replaceRecords(folder, all, paths)
}

// shardEntries are the last entries of each output in a shard's record.
type shardEntries struct {
	shard   Shard
	entries map[string]*Entry
}

func readShards(folder string) (shards []shardEntries, paths []string, err error) {
	for _, path := range recordsIn(folder) {
		var s Shard
		pattern := strings.TrimSuffix(RecordName, recordExt) + ".%d-of-%d" + recordExt
		if _, err := fmt.Sscanf(strings.ToLower(filepath.Base(path)), pattern, &s.Index, &s.Count); err != nil {
			continue // the whole record
		}
		entries, err := readRecord(path)
		if err != nil {
			return nil, nil, err
		}
		shards, paths = append(shards, shardEntries{s, entries}), append(paths, path)
	}
	if shards == nil {
		return nil, nil, fmt.Errorf("%s: there are no records of shards, such as %s; name the folder that render --shard wrote to", folder, recordNameOf(Shard{1, 4}))
	}
	return shards, paths, nil
}

// checkShards finds all that is wrong at once.
func checkShards(folder string, shards []shardEntries, mixed bool) error {
	var problems Problems
	problem := func(format string, args ...any) {
		problems = append(problems, fmt.Errorf("%s: "+format, append([]any{folder}, args...)...))
	}
	count := shards[0].shard.Count
	present := map[int]bool{}
	batches, kernels, owner := map[string]bool{}, map[string]bool{}, map[string]Shard{}
	expected := 0
	for _, s := range shards {
		if s.shard.Count != count {
			problem("records of %d and of %d shards are mixed; remove those of the batch that is not meant", count, s.shard.Count)
			return problems
		}
		present[s.shard.Index] = true
		for _, e := range sorted(s.entries) {
			if other, ok := owner[string(e.Output)]; ok {
				problem("%s is in the records of shards %s and %s; the batch changed between them, so render it again", e.Output, other, s.shard)
			}
			owner[string(e.Output)] = s.shard
			batches[e.Batch] = true
			kernels[e.Kernel] = true
			expected = max(expected, e.BatchCount)
		}
	}
	for i := 1; i <= count; i++ {
		if !present[i] {
			problem("the record of shard %d/%d is missing; run render --shard %[2]d/%[3]d", i, count)
		}
	}
	if len(batches) > 1 {
		problem("the shards saw different sets of recordings; render all of them again over the same ones")
	}
	if missing := expected - len(owner); missing > 0 && len(present) == count {
		problem("%d of %d recordings are in no record; run the shards again to finish them", missing, expected)
	}
	if len(kernels) > 1 && !mixed {
		problem("the shards used different kernels, %s, whose outputs differ by rounding; render with one --kernel, or accept the mix with --mixed-kernels", strings.Join(keys(kernels), " and "))
	}
	if problems == nil {
		return nil
	}
	return problems
}

func keys(m map[string]bool) []string {
	var out []string
	for k := range m {
		out = append(out, k)
	}
	slices.Sort(out)
	return out
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
func replaceRecords(folder string, entries map[string]*Entry, others []string) error {
	var b bytes.Buffer
	enc := json.NewEncoder(&b)
	enc.SetEscapeHTML(false)
	for _, e := range sorted(entries) {
		if err := enc.Encode(e); err != nil {
			return err
		}
	}
	path := filepath.Join(folder, RecordName)
	if err := renameio.WriteFile(path, b.Bytes(), 0o666, renameio.WithTempDir(folder)); err != nil {
		return unwritableRecord(path, err)
	}
	var problems []error
	for _, other := range others {
		if err := os.Remove(other); err != nil {
			problems = append(problems, fmt.Errorf("the record %s: is merged but cannot be removed: %w; remove it by hand", other, cause(err)))
		}
	}
	return errors.Join(problems...)
}
