package batch

import (
	"fmt"
	"slices"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

// TestShare: of whatever sizes, each recording is in exactly one part, in the
// batch's order, and no two parts differ by more than the largest recording.
func TestShare(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		sizes := rapid.SliceOfN(rapid.OneOf(rapid.Int64Range(0, 1000), rapid.Int64Range(0, 1<<40)), 0, 40).Draw(t, "sizes")
		count := rapid.IntRange(1, 5).Draw(t, "count")
		mustShare(t, sizes, count)
	})
}

func TestShareOfVeryDifferentSizes(t *testing.T) {
	var sizes []int64
	for i := range 30 {
		sizes = append(sizes, 1<<i)
	}
	for count := 1; count <= 5; count++ {
		mustShare(t, sizes, count)
	}
	mustShare(t, []int64{5, 5, 5}, 7) // more parts than recordings
	mustShare(t, nil, 3)
}

func mustShare(t rapid.TB, sizes []int64, count int) {
	t.Helper()
	var jobs []*Job
	largest := int64(0)
	for i, size := range sizes {
		jobs = append(jobs, &Job{Input: Input{Rel: fmt.Sprintf("%03d.wav", i)}, Bytes: size})
		largest = max(largest, size+perRecording)
	}
	owner := map[*Job]int{}
	var loads []int64
	for i := 1; i <= count; i++ {
		part := Shard{i, count}.share(jobs)
		if !slices.IsSortedFunc(part, func(a, b *Job) int { return strings.Compare(a.Rel, b.Rel) }) {
			t.Errorf("shard %d/%d is out of order", i, count)
		}
		load := int64(0)
		for _, j := range part {
			if owner[j] != 0 {
				t.Errorf("%s is in shards %d and %d of %d", j.Rel, owner[j], i, count)
			}
			owner[j], load = i, load+j.Bytes+perRecording
		}
		loads = append(loads, load)
	}
	if len(owner) != len(jobs) {
		t.Errorf("%d shards hold %d of %d recordings", count, len(owner), len(jobs))
	}
	if least, most := slices.Min(loads), slices.Max(loads); most-least > largest {
		t.Errorf("%d shards have loads from %d to %d; the largest recording is %d", count, least, most, largest)
	}
}

// TestShareOfAHugeCount does not take memory for parts that have nothing to do.
func TestShareOfAHugeCount(t *testing.T) {
	jobs := []*Job{{Bytes: 1}, {Bytes: 2}}
	const huge = 1 << 60
	if n := len(Shard{1, huge}.share(jobs)) + len(Shard{2, huge}.share(jobs)) + len(Shard{huge, huge}.share(jobs)); n != 2 {
		t.Errorf("%d recordings, want 2", n)
	}
}

func TestParseShard(t *testing.T) {
	for text, want := range map[string]Shard{"1/1": {1, 1}, "2/8": {2, 8}, "8/8": {8, 8}} {
		if got, err := ParseShard(text); err != nil || got != want || got.String() != text {
			t.Errorf("%q: %v, %v", text, got, err)
		}
	}
	for _, text := range []string{"", "2", "0/8", "9/8", "-1/8", "1/0", "1/-1", "a/b", "1/8/2", "1 / 8", "1.5/8", "Auto", "/", "99999999999999999999/8"} {
		if got, err := ParseShard(text); err == nil || !strings.Contains(err.Error(), "such as 2/8") {
			t.Errorf("%q: %v, %v", text, got, err)
		}
	}
}

// TestShardOfArray: the variables are those of Slurm's sbatch manual.
func TestShardOfArray(t *testing.T) {
	tests := []struct {
		id, least, step, count string
		want                   Shard
		words                  string // of the error
	}{
		{id: "1", least: "1", step: "1", count: "4", want: Shard{1, 4}},
		{id: "4", least: "1", step: "1", count: "4", want: Shard{4, 4}},
		{id: "0", least: "0", step: "1", count: "4", want: Shard{1, 4}},
		{id: "3", least: "0", step: "1", count: "4", want: Shard{4, 4}},
		{id: "8", least: "0", step: "4", count: "4", want: Shard{3, 4}}, // 0-15:4
		{id: "7", least: "1", step: "3", count: "3", want: Shard{3, 3}}, // 1-9:3
		{id: "1", least: "1", step: "0", count: "1", want: Shard{1, 1}}, // --array=1
		{id: "5", least: "1", step: "1", count: "3", words: "no place in a row"},
		{id: "2", least: "1", step: "3", count: "3", words: "no place in a row"},
		{id: "3", least: "3", step: "1", count: "1", words: "repeats a few tasks"}, // --array=3
		{id: "1", least: "2", step: "1", count: "3", words: "repeats a few tasks"},
		{id: "", least: "1", step: "1", count: "4", words: "no number in SLURM_ARRAY_TASK_ID"},
		{id: "1", least: "x", step: "1", count: "4", words: "no number in SLURM_ARRAY_TASK_MIN"},
		{id: "1", least: "1", step: "", count: "4", words: "no number in SLURM_ARRAY_TASK_STEP"},
		{id: "1", least: "1", step: "1", count: "", words: "no number in SLURM_ARRAY_TASK_COUNT"},
	}
	for _, test := range tests {
		got, err := shardOfArray(func(name string) string {
			return map[string]string{
				"SLURM_ARRAY_TASK_ID": test.id, "SLURM_ARRAY_TASK_MIN": test.least,
				"SLURM_ARRAY_TASK_STEP": test.step, "SLURM_ARRAY_TASK_COUNT": test.count,
			}[name]
		})
		switch {
		case test.words == "" && (err != nil || got != test.want):
			t.Errorf("%+v: %v, %v", test, got, err)
		case test.words != "" && (err == nil || !strings.Contains(err.Error(), test.words)):
			t.Errorf("%+v: %v, %v", test, got, err)
		}
	}
}
