package main

import (
	"fmt"
	"maps"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"fettle/audio/needs"
	"fettle/cmd/fettle/internal/batch"
	"fettle/filter/stream/machine"
)

// mixedSizes puts recordings of very different sizes below in/ and tells their
// names.
func (b *bench) mixedSizes() []string {
	b.t.Helper()
	var rels []string
	for i, frames := range []int{1, 10, 30000, 3, 2500, 900, 20000, 40, 7000, 5, 1200} {
		rel := fmt.Sprintf("%d/%d.wav", i%3, i)
		b.recording("in/"+rel, "pcm16", rate, 1, noise(frames, uint32(i+1)))
		rels = append(rels, rel)
	}
	slices.Sort(rels)
	return rels
}

// shard renders a part of in/ into Out.
func (b *bench) shard(part string, args ...string) outcome {
	b.t.Helper()
	return b.render(filterChain, append([]string{"--shard", part, b.path("in")}, args...)...)
}

// gather runs gather on Out.
func (b *bench) gather(args ...string) outcome {
	return fettle(append([]string{"gather", b.Out}, args...)...)
}

// hashes gives the SHA-256 of all outputs; records are none.
func (b *bench) hashes() map[string]string {
	b.t.Helper()
	out := map[string]string{}
	for _, rel := range b.outputs() {
		if filepath.Ext(rel) != ".jsonl" {
			out[rel] = hash(b.t, filepath.Join(b.Out, rel))
		}
	}
	return out
}

// mustGatherNothing checks that gather refuses, says these words and leaves all as
// it was.
func (b *bench) mustGatherNothing(words ...string) {
	b.t.Helper()
	before := b.everything()
	b.gather().must(b.t, exitNotStarted, words...)
	if after := b.everything(); !maps.Equal(before, after) {
		b.t.Errorf("gather changed %v into %v", before, after)
	}
}

// everything gives the SHA-256 of all files below the bench, records too.
func (b *bench) everything() map[string]string {
	b.t.Helper()
	all := &bench{b.t, b.Dir, b.Dir}
	out := map[string]string{}
	for _, rel := range all.outputs() {
		if info, err := os.Stat(b.path(rel)); err == nil && info.Mode().IsRegular() {
			out[rel] = fmt.Sprint(hash(b.t, b.path(rel)), info.ModTime())
		} else {
			out[rel] = "no file"
		}
	}
	return out
}

// TestShards: in however many parts, the outputs are those of one process, byte
// for byte, each made once; gather makes one record of all and verify agrees.
func TestShards(t *testing.T) {
	var want map[string]string
	for count := 0; count <= 5; count++ {
		b := newBench(t)
		rels := b.mixedSizes()
		if count == 0 { // one process: the outputs to come to, whatever its jobs
			for _, jobs := range []string{"1", "8"} {
				b.Out = b.path("out" + jobs)
				b.render(filterChain, "--jobs", jobs, b.path("in")).must(t, exitDone)
				if got := b.hashes(); want != nil && !maps.Equal(got, want) {
					t.Errorf("--jobs %s gives other bytes", jobs)
				}
				want = b.hashes()
			}
			mustEqual(t, "outputs", len(want), len(rels))
			continue
		}
		made := 0
		for i := 1; i <= count; i++ {
			b.shard(fmt.Sprintf("%d/%d", i, count), "--jobs", fmt.Sprint(i)).must(t, exitDone)
			part := b.recordNamed(fmt.Sprintf("treatment.%d-of-%d.jsonl", i, count))
			made += len(part)
			for _, entry := range part {
				mustEqual(t, "shard", entry["shard"], any(fmt.Sprintf("%d/%d", i, count)))
			}
		}
		mustEqual(t, "entries of all shards", made, len(rels))
		if got := b.hashes(); !maps.Equal(got, want) {
			t.Errorf("%d shards give %v, one process %v", count, got, want)
		}
		got := b.gather()
		got.must(t, exitDone)
		mustEqual(t, "stdout", got.stdout, fmt.Sprintf("11 recordings of %d shard%s in one record\n", count, strings.Repeat("s", min(count-1, 1))))
		b.mustHold(rels...) // and the one record: none of the shards'
		var recorded []string
		for _, entry := range b.record() {
			recorded = append(recorded, entry["output"].(string))
		}
		if !slices.Equal(recorded, rels) {
			t.Errorf("the record holds %q", recorded)
		}
		fettle("verify", b.Out).must(t, exitDone)
		b.render(filterChain, b.path("in")).must(t, exitDone) // nothing is left to do
		mustEqual(t, "entries after another run", len(b.record()), len(rels))
	}
}

// TestMoreShardsThanRecordings: those without work say so and are not missed.
func TestMoreShardsThanRecordings(t *testing.T) {
	b := newBench(t)
	b.plain("in/a.wav")
	for i := 1; i <= 3; i++ {
		b.shard(fmt.Sprintf("%d/3", i)).must(t, exitDone)
	}
	b.gather().must(t, exitDone)
	b.mustHold("a.wav")
	mustEqual(t, "entries", len(b.record()), 1)
}

// TestShardOfAnArray takes its part from a Slurm job array's environment.
func TestShardOfAnArray(t *testing.T) {
	b := newBench(t)
	b.mixedSizes()
	b.shard("auto").must(t, exitNotStarted, "--shard: auto", "SLURM_ARRAY_TASK_ID", "2/8")
	mustEqual(t, "outputs", len(b.outputs()), 0)
	t.Setenv("SLURM_ARRAY_TASK_ID", "7")
	t.Setenv("SLURM_ARRAY_TASK_MIN", "1")
	t.Setenv("SLURM_ARRAY_TASK_STEP", "3")
	t.Setenv("SLURM_ARRAY_TASK_COUNT", "4")
	b.shard("auto").must(t, exitDone)
	if part := b.recordNamed("treatment.3-of-4.jsonl"); len(part) == 0 || len(part) >= 11 {
		t.Errorf("the third of four shards holds %d of 11 recordings", len(part))
	}
	t.Setenv("SLURM_ARRAY_TASK_MIN", "3")
	t.Setenv("SLURM_ARRAY_TASK_COUNT", "1")
	b.shard("auto").must(t, exitNotStarted, "--shard: auto", "begins at 3", "give the part itself")
	b.shard("9/8").must(t, exitNotStarted, "--shard", `"9/8"`, "such as 2/8")
}

// TestResumeOfAShard: what it has done is not done again, nor what the batch did
// before it was parted, or parted otherwise; the shards' records hold all of it.
func TestResumeOfAShard(t *testing.T) {
	b := newBench(t)
	rels := b.mixedSizes()
	b.render(filterChain, b.path("in")).must(t, exitDone)
	mustDo(t, os.Remove(filepath.Join(b.Out, rels[2])))
	first := b.stats()
	b.shard("1/2").must(t, exitDone)
	b.shard("1/2").must(t, exitDone)
	for i := 1; i <= 3; i++ {
		b.shard(fmt.Sprintf("%d/3", i)).must(t, exitDone)
	}
	b.mustHaveKept(first)
	b.mustGatherNothing("records of 2 and of 3 shards are mixed")
	mustDo(t, os.Remove(filepath.Join(b.Out, "treatment.1-of-2.jsonl")))
	b.gather().must(t, exitDone)
	b.mustHold(rels...)
	mustEqual(t, "entries", len(b.record()), len(rels))

	// A batch that grew: the shards do what is new.
	b.recording("in/new.wav", "pcm16", rate, 1, noise(500, 99))
	first = b.stats()
	for i := 1; i <= 3; i++ {
		b.shard(fmt.Sprintf("%d/3", i)).must(t, exitDone)
	}
	b.gather().must(t, exitDone)
	mustEqual(t, "entries", len(b.record()), len(rels)+1)
	b.mustHaveKept(first)

	// And one that shrank.
	mustDo(t, os.Remove(b.path("in/"+rels[0])))
	for i := 1; i <= 3; i++ {
		b.shard(fmt.Sprintf("%d/3", i)).must(t, exitDone)
	}
	b.gather().must(t, exitDone)
	fettle("verify", b.Out).must(t, exitDone)
}

// stats tells which file stands under a name: a new one has another number.
func (b *bench) stats() map[string]string {
	b.t.Helper()
	out := map[string]string{}
	for _, rel := range b.outputs() {
		info, err := os.Stat(filepath.Join(b.Out, rel))
		mustDo(b.t, err)
		out[rel] = fmt.Sprint(info.ModTime().UnixNano(), " ", info.Size(), " ", inode(info))
	}
	return out
}

// mustHaveKept checks that the outputs of before are still the same files.
func (b *bench) mustHaveKept(before map[string]string) {
	b.t.Helper()
	now := b.stats()
	for rel, was := range before {
		if filepath.Ext(rel) == ".wav" && now[rel] != was {
			b.t.Errorf("%s was treated again", rel)
		}
	}
}

// TestFailedInAShard: the batch is gathered, and says so.
func TestFailedInAShard(t *testing.T) {
	b := newBench(t)
	b.mixedSizes()
	bad := b.file("in/bad.wav", []byte("no sound"))
	failed := 0
	for i := 1; i <= 2; i++ {
		if got := b.shard(fmt.Sprintf("%d/2", i)); got.status == exitSomeFailed {
			got.must(t, exitSomeFailed, bad)
			failed++
		} else {
			got.must(t, exitDone)
		}
	}
	mustEqual(t, "shards with a failure", failed, 1)
	got := b.gather()
	got.must(t, exitSomeFailed, bad, "not a WAV file")
	mustEqual(t, "stdout", got.stdout, "11 recordings of 2 shards in one record, 1 failed\n")
	mustEqual(t, "entries", len(b.record()), 12)
	fettle("verify", b.Out).must(t, exitSomeFailed, "bad.wav", "not treated")
}

// TestGatherRefuses what is not one whole batch, and changes nothing then.
func TestGatherRefuses(t *testing.T) {
	start := func(t *testing.T) *bench {
		b := newBench(t)
		b.mixedSizes()
		b.shard("1/2").must(t, exitDone)
		b.shard("2/2").must(t, exitDone)
		return b
	}
	t.Run("nothing there", func(t *testing.T) {
		b := newBench(t)
		b.mustGatherNothing(b.Out, "no records of shards", "treatment.1-of-4.jsonl")
		b.plain("in/a.wav")
		b.render(filterChain, b.path("in")).must(t, exitDone)
		b.mustGatherNothing("no records of shards")
	})
	t.Run("arguments", func(t *testing.T) {
		fettle("gather").must(t, exitNotStarted, "gather: takes one folder", "fettle gather --help")
		fettle("gather", "a", "b").must(t, exitNotStarted, "takes one folder")
	})
	t.Run("missing shard", func(t *testing.T) {
		b := start(t)
		mustDo(t, os.Remove(filepath.Join(b.Out, "treatment.2-of-2.jsonl")))
		b.mustGatherNothing("shard 2/2 is missing", "--shard 2/2")
	})
	t.Run("unfinished shard", func(t *testing.T) {
		b := start(t)
		path := filepath.Join(b.Out, "treatment.2-of-2.jsonl")
		lines := strings.SplitAfter(string(read(t, path)), "\n")
		mustDo(t, os.WriteFile(path, []byte(strings.Join(lines[1:], "")), 0o666))
		b.mustGatherNothing("1 of 11 recordings are in no record")
		b.shard("2/2").must(t, exitDone)
		b.gather().must(t, exitDone)
	})
	t.Run("recording twice", func(t *testing.T) {
		b := start(t)
		first, second := filepath.Join(b.Out, "treatment.1-of-2.jsonl"), filepath.Join(b.Out, "treatment.2-of-2.jsonl")
		line, _, _ := strings.Cut(string(read(t, first)), "\n")
		mustDo(t, os.WriteFile(second, append(read(t, second), line+"\n"...), 0o666))
		b.mustGatherNothing(b.recordNamed("treatment.1-of-2.jsonl")[0]["output"].(string), "is in the records of shards 1/2 and 2/2")
	})
	t.Run("different recordings", func(t *testing.T) {
		b := start(t)
		b.recording("in/new.wav", "pcm16", rate, 1, noise(50_000, 99))
		b.shard("1/2").must(t, exitDone)
		b.mustGatherNothing("different recordings", "run all of them again")
		b.shard("2/2").must(t, exitDone)
		b.gather().must(t, exitDone)
	})
	t.Run("different chains", func(t *testing.T) {
		b := start(t)
		b.render(linearChain, "--shard", "1/2", b.path("in")).must(t, exitDone)
		b.mustGatherNothing("different chains")
	})
	t.Run("different numbers of shards", func(t *testing.T) {
		b := start(t)
		b.shard("1/3").must(t, exitDone)
		b.mustGatherNothing("records of 2 and of 3 shards are mixed")
	})
	t.Run("a record that is none", func(t *testing.T) {
		b := start(t)
		mustDo(t, os.WriteFile(filepath.Join(b.Out, "treatment.2-of-2.jsonl"), []byte("notes\n"), 0o666))
		b.mustGatherNothing("treatment.2-of-2.jsonl", "line 1")
	})
	t.Run("mixed kernels", func(t *testing.T) {
		other := machine.Available()[len(machine.Available())-1].String()
		if other == "portable" {
			needs.Missing(t, "missing: a processor with AVX2 and FMA, for a second kernel")
		}
		b := newBench(t)
		b.mixedSizes()
		b.shard("1/2", "--kernel", other).must(t, exitDone)
		b.shard("2/2", "--kernel", "portable").must(t, exitDone)
		b.mustGatherNothing("different kernels", other+" and portable", "--mixed-kernels")
		b.gather("--mixed-kernels").must(t, exitDone)
		mustEqual(t, "entries", len(b.record()), 11)
	})
}

// TestGatherAgain: one that was killed between the new record and the removal of
// the old ones is taken up again.
func TestGatherAgain(t *testing.T) {
	b := newBench(t)
	b.mixedSizes()
	b.shard("1/2").must(t, exitDone)
	b.shard("2/2").must(t, exitDone)
	left := filepath.Join(b.Out, "treatment.2-of-2.jsonl")
	content := read(t, left)
	b.gather().must(t, exitDone)
	mustDo(t, os.WriteFile(left, content, 0o666))
	b.gather().must(t, exitDone)
	if _, err := os.Stat(left); err == nil {
		t.Errorf("%s is still there", left)
	}
	mustEqual(t, "entries", len(b.record()), 11)

	// But not one that was added to since.
	touched := b.path("in/" + b.recordNamed(batch.RecordName)[0]["output"].(string))
	mustDo(t, os.WriteFile(touched, read(t, b.path("in/0/6.wav")), 0o666))
	if strings.HasSuffix(touched, "0/6.wav") {
		t.Fatal("the first recording is the sixth")
	}
	b.shard("1/2").must(t, exitDone)
	b.mustGatherNothing("shard 2/2 is missing")
}
