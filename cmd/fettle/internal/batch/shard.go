package batch

import (
	"cmp"
	"crypto/sha256"
	"fmt"
	"os"
	"slices"
	"strconv"
	"strings"
)

// Shard is part Index, from 1, of a batch in Count parts. The zero Shard is a
// whole batch.
type Shard struct{ Index, Count int }

func (s Shard) String() string {
	if s.Count == 0 {
		return ""
	}
	return fmt.Sprintf("%d/%d", s.Index, s.Count)
}

// ParseShard reads "2/8"; "auto" takes the place of this task in a Slurm job
// array from the environment.
func ParseShard(text string) (Shard, error) {
	if text == "auto" {
		return shardOfArray(os.Getenv)
	}
	index, count, ok := strings.Cut(text, "/")
	i, err1 := strconv.Atoi(index)
	n, err2 := strconv.Atoi(count)
	if !ok || err1 != nil || err2 != nil || i < 1 || i > n {
		return Shard{}, fmt.Errorf("%q is no part of a batch; give one such as 2/8, the second of eight, or auto in a job array", text)
	}
	return Shard{i, n}, nil
}

// shardOfArray reads the variables that Slurm sets in the tasks of a job array
// (Slurm's sbatch manual, "OUTPUT ENVIRONMENT VARIABLES").
func shardOfArray(getenv func(string) string) (Shard, error) {
	var v [4]int
	for i, name := range []string{"SLURM_ARRAY_TASK_ID", "SLURM_ARRAY_TASK_MIN", "SLURM_ARRAY_TASK_STEP", "SLURM_ARRAY_TASK_COUNT"} {
		n, err := strconv.Atoi(getenv(name))
		if err != nil {
			return Shard{}, fmt.Errorf("auto: the environment has no number in %s, as the tasks of a Slurm job array have; give the part itself, such as 2/8", name)
		}
		v[i] = n
	}
	id, least, step, count := v[0], v[1], max(1, v[2]), v[3]
	if least > 1 {
		return Shard{}, fmt.Errorf("auto: the array begins at %d, as one does that repeats a few tasks of another; give the part itself, such as %d/8", least, least)
	}
	s := Shard{(id-least)/step + 1, count}
	if (id-least)%step != 0 || s.Index < 1 || s.Index > count {
		return Shard{}, fmt.Errorf("auto: task %d of an array of %d from %d by %d has no place in a row; use an array without gaps, such as 1-%[2]d", id, count, least, step)
	}
	return s, nil
}

// share marks which jobs are a shard's: the largest first, each to the shard that
// has least so far. It depends on the jobs' names and sizes alone.
func (s Shard) share(jobs []*Job) []*Job {
	if s.Count == 0 {
		return jobs
	}
	order := slices.Clone(jobs)
	slices.SortStableFunc(order, func(a, b *Job) int { return cmp.Compare(b.Bytes, a.Bytes) })
	load := make([]int64, min(s.Count, len(jobs))) // more have nothing to do
	mine := map[*Job]bool{}
	for _, j := range order {
		least := 0
		for i, l := range load {
			if l < load[least] {
				least = i
			}
		}
		load[least] += j.Bytes + perRecording
		mine[j] = least == s.Index-1
	}
	return slices.DeleteFunc(slices.Clone(jobs), func(j *Job) bool { return !mine[j] })
}

// perRecording is what a recording costs beside its bytes, in bytes.
const perRecording = 1 << 16

// identify sums up which recordings a batch holds and how they are treated, so that
// parts of different batches are not taken for parts of one.
func (p *Plan) identify() string {
	h := sha256.New()
	for _, j := range p.Jobs {
		fmt.Fprintf(h, "%q %d %s\n", j.Rel, j.Bytes, p.settings(j))
	}
	return fmt.Sprintf("%x", h.Sum(nil)[:8])
}

// adopt enters in a shard's record what is its part and was done before, for another
// batch or as another shard, so that the record tells of the whole part.
func (p *Plan) adopt(rec *record) error {
	if p.Options.Shard.Count == 0 {
		return nil
	}
	own, err := readRecord(p.recordPath())
	if err != nil {
		return err
	}
	var adopted []*Entry
	for _, j := range p.Jobs {
		if !j.Done || own[j.Rel] != nil && own[j.Rel].Batch == p.batch {
			continue
		}
		e := *j.past
		e.Shard, e.Batch, e.BatchCount = p.Options.Shard.String(), p.batch, p.count
		adopted = append(adopted, &e)
	}
	return rec.append(adopted...)
}
