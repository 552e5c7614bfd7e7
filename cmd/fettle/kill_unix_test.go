//go:build unix

package main

import (
	"bytes"
	"encoding/json"
	"fmt"
	"io/fs"
	"math/rand/v2"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"syscall"
	"testing"
	"time"

	"fettle/cmd/fettle/internal/batch"
)

// program builds the program as a process is needed that can be killed.
func program(t *testing.T) string {
	t.Helper()
	path := filepath.Join(t.TempDir(), "fettle")
	if out, err := exec.Command("go", "build", "-o", path, ".").CombinedOutput(); err != nil {
		t.Fatalf("%v: %s", err, out)
	}
	return path
}

// killed is a batch that is killed over and over.
type killed struct {
	*bench
	program string
	right   map[string]string // what outputs and what is removed must come to, by hash
	took    time.Duration     // from start to end, about
	kept    map[string]string // what the record said was done: these files stay
	amidst  int               // kills that left files under way
}

func (k *killed) waste() string { return k.Out + " waste" }

// start begins the batch as a process.
func (k *killed) start(jobs int) (*exec.Cmd, *bytes.Buffer) {
	k.t.Helper()
	cmd := exec.Command(k.program, "render", "--chain", k.path("chain.yaml"), "--out", k.Out, "--removed", k.waste(), "--jobs", fmt.Sprint(jobs), k.path("in"))
	var said bytes.Buffer
	cmd.Stdout, cmd.Stderr = &said, &said
	mustDo(k.t, cmd.Start())
	return cmd, &said
}

// finish runs the batch to its end and checks what has become of it.
func (k *killed) finish() {
	k.t.Helper()
	cmd, said := k.start(2)
	if err := cmd.Wait(); err != nil {
		k.t.Fatalf("%v: %s", err, said)
	}
	k.mustBeDone()
}

// found gives the hashes of all files of the batch that are no records.
func (k *killed) found() map[string]string {
	k.t.Helper()
	out := map[string]string{}
	for side, root := range map[string]string{"out": k.Out, "waste": k.waste()} {
		mustDo(k.t, filepath.WalkDir(root, func(path string, e fs.DirEntry, err error) error {
			if err == nil && !e.IsDir() && !strings.HasPrefix(e.Name(), "treatment.") {
				rel, _ := filepath.Rel(root, path)
				out[filepath.Join(side, rel)] = hash(k.t, path)
			}
			if os.IsNotExist(err) {
				return nil
			}
			return err
		}))
	}
	return out
}

// entries reads the record as a killed run leaves it: its last line may be torn.
func (k *killed) entries() []map[string]any {
	k.t.Helper()
	raw, err := os.ReadFile(filepath.Join(k.Out, batch.RecordName))
	if !os.IsNotExist(err) {
		mustDo(k.t, err)
	}
	var out []map[string]any
	for line := range bytes.Lines(raw) {
		if !bytes.HasSuffix(line, []byte("\n")) {
			break
		}
		var entry map[string]any
		mustDo(k.t, json.Unmarshal(line, &entry))
		out = append(out, entry)
	}
	return out
}

// mustBeWhole checks what a kill leaves: what has an output's name is whole, what
// is recorded is there, and what was recorded before is still the same file.
func (k *killed) mustBeWhole() {
	k.t.Helper()
	found := k.found()
	underWay := 0
	for file, sum := range found {
		if want, ok := k.right[file]; ok && sum != want {
			k.t.Errorf("%s is not what it must be", file)
		} else if !ok && strings.HasPrefix(filepath.Base(file), ".") {
			underWay++
		} else if !ok {
			k.t.Errorf("%s is there", file)
		}
	}
	k.amidst += min(underWay, 1)
	stats := k.stats()
	for _, entry := range k.entries() {
		rel := entry["output"].(string)
		mustEqual(k.t, rel+": status", entry["status"], any("done"))
		if found[filepath.Join("out", rel)] == "" || found[filepath.Join("waste", rel)] == "" {
			k.t.Errorf("%s is recorded and not there", rel)
		}
		if was := k.kept[rel]; was != "" && was != stats[rel] {
			k.t.Errorf("%s was recorded and treated again", rel)
		}
		k.kept[rel] = stats[rel]
	}
}

// mustBeDone checks a batch that has come to its end: all is there as if nothing
// had happened, recorded once, and nothing else.
func (k *killed) mustBeDone() {
	k.t.Helper()
	k.mustBeWhole()
	found := k.found()
	for file := range found {
		if k.right[file] == "" {
			k.t.Errorf("%s was left behind", file)
		}
	}
	mustEqual(k.t, "files", len(found), len(k.right))
	mustEqual(k.t, "entries", len(k.entries()), len(k.right)/2)
	mustEqual(k.t, "outputs recorded", len(k.kept), len(k.right)/2)
}

// anew begins in another folder.
func (k *killed) anew(name string) {
	k.Out, k.kept = k.path(name), map[string]string{}
}

// TestKilled kills a batch at random instants and lets it go on, over and over:
// whenever it is killed nothing is half done, what was finished is not done again,
// and at its end all is as if it had never been killed. With FETTLE_KILLS set, 50
// kills of a batch of 200.
func TestKilled(t *testing.T) {
	kills, count := 5, 40
	if os.Getenv("FETTLE_KILLS") != "" {
		kills, count = 50, 200
	}
	k := &killed{bench: newBench(t), program: program(t)}
	r := rand.New(rand.NewPCG(1, 2))
	for i := range count {
		k.recording(fmt.Sprintf("in/%d/%d.wav", i%7, i), "pcm24", rate, 2, noise(2*(1+r.IntN(20_000)), uint32(i+1)))
	}
	k.chain(linearChain)
	k.anew("undisturbed")
	begun := time.Now()
	cmd, said := k.start(2)
	if err := cmd.Wait(); err != nil {
		t.Fatalf("%v: %s", err, said)
	}
	undisturbed := time.Since(begun)
	k.took, k.right = undisturbed, k.found()
	mustEqual(t, "outputs and removed", len(k.right), 2*count)

	k.anew("killed 0")
	finished := 0
	for n := 0; n < kills; {
		cmd, said := k.start(1 + r.IntN(4))
		time.Sleep(time.Duration(r.Int64N(int64(k.took))))
		mustDo(t, cmd.Process.Kill()) // does nothing to one that has ended
		err := cmd.Wait()
		switch status := cmd.ProcessState.Sys().(syscall.WaitStatus); {
		case status.Signal() == syscall.SIGKILL:
			n++
			k.mustBeWhole()
		case err == nil: // was done before it could be killed
			k.mustBeDone()
			finished++
			k.took = k.took * 9 / 10 // the machine has become faster
			k.anew(fmt.Sprintf("killed %d", finished))
		default:
			t.Fatalf("%v: %s", err, said)
		}
	}
	k.finish()
	t.Logf("%d kills, %d of them amidst files; %d batches of %d recordings, %v undisturbed", kills, k.amidst, finished+1, count, undisturbed.Round(time.Millisecond))
}

// TestInterruptedProcess: a signal of the terminal ends it in order, nothing half
// done stays, and the same command goes on.
func TestInterruptedProcess(t *testing.T) {
	k := &killed{bench: newBench(t), program: program(t)}
	for i := range 60 {
		k.recording(fmt.Sprintf("in/%d/%d.wav", i%3, i), "pcm24", rate, 2, noise(2*20_000, uint32(i+1)))
	}
	k.chain(linearChain)
	k.anew("undisturbed")
	cmd, said := k.start(2)
	if err := cmd.Wait(); err != nil {
		t.Fatalf("%v: %s", err, said)
	}
	k.right = k.found()

	k.anew("interrupted")
	for range 3 {
		cmd, said := k.start(2)
		before := len(k.entries())
		for deadline := time.Now().Add(time.Minute); len(k.entries()) == before && time.Now().Before(deadline); {
			time.Sleep(time.Millisecond) // until it is at work
		}
		mustDo(t, cmd.Process.Signal(syscall.SIGINT))
		err := cmd.Wait()
		if err == nil {
			break // was done before it could be interrupted
		}
		if cmd.ProcessState.ExitCode() != exitInterrupted || !strings.Contains(said.String(), "the same command goes on from there") {
			t.Errorf("%v: %s", err, said)
		}
		k.mustBeWhole()
		for file := range k.found() {
			if k.right[file] == "" {
				t.Errorf("%s was left behind", file)
			}
		}
	}
	k.finish()
}
