//go:build unix

package main

import (
	"context"
	"fmt"
	"maps"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"syscall"
	"testing"
	"time"

	"fettle/audio/needs"
)

// needsPrograms names the programs that are missing.
func needsPrograms(t *testing.T, packages string, programs ...string) {
	t.Helper()
	var missing []string
	for _, p := range programs {
		if _, err := exec.LookPath(p); err != nil {
			missing = append(missing, p)
		}
	}
	if missing != nil {
		needs.Missing(t, "missing: %s (Debian: %s)", strings.Join(missing, ", "), packages)
	}
}

// TestSlurmArray cleans 100 recordings as a job array of four tasks, under a real
// Slurm with controller and node daemon on this machine: the bytes are those of
// one process.
func TestSlurmArray(t *testing.T) {
	t.Setenv("PATH", os.Getenv("PATH")+":/usr/sbin:/sbin") // where Debian puts the daemons
	needsPrograms(t, "slurm-wlm munge", "bash", "munged", "slurmctld", "slurmd", "sbatch", "sinfo", "squeue", "scancel")
	b := newBench(t)
	const count, tasks = 100, 4
	for i := range count {
		b.recording(fmt.Sprintf("in/%d/%d.wav", i%7, i), "pcm16", rate, 1, noise(1+(i*7919)%9000, uint32(i+1)))
	}
	b.chain(linearChain)
	b.Out = b.path("one")
	b.render(linearChain, b.path("in")).must(t, exitDone)
	want := b.hashes()

	b.Out = b.path("array")
	ctx, cancel := context.WithTimeout(context.Background(), 2*time.Minute)
	defer cancel()
	script, err := filepath.Abs("_slurm/array.sbatch")
	mustDo(t, err)
	cmd := exec.CommandContext(ctx, "_slurm/cluster", "sbatch", "--wait", "--output="+b.path("task-%a.log"), script, b.path("chain.yaml"), b.Out, b.path("in"))
	cmd.Env = append(os.Environ(), "PATH="+filepath.Dir(program(t))+":"+os.Getenv("PATH"), "TMPDIR=/tmp") // sockets have short names
	cmd.Cancel = func() error { return cmd.Process.Signal(syscall.SIGTERM) }                              // so that it ends its daemons
	cmd.WaitDelay = 20 * time.Second
	if said, err := cmd.CombinedOutput(); err != nil {
		for i := range tasks {
			log, _ := os.ReadFile(b.path(fmt.Sprintf("task-%d.log", i+1)))
			t.Logf("task %d: %s", i+1, log)
		}
		t.Fatalf("%v: %s", err, said)
	}
	for i := 1; i <= tasks; i++ {
		if n := len(b.recordNamed(fmt.Sprintf("treatment.%d-of-%d.jsonl", i, tasks))); n == 0 || n == count {
			t.Errorf("task %d did %d of %d recordings", i, n, count)
		}
	}
	if got := b.hashes(); len(got) != count || !maps.Equal(got, want) {
		t.Errorf("%d outputs that are not those of one process", len(got))
	}
	got := b.gather()
	got.must(t, exitDone)
	mustEqual(t, "stdout", got.stdout, fmt.Sprintf("%d recordings of %d shards in one record\n", count, tasks))
	fettle("verify", "--originals", b.Out).must(t, exitDone)
}
