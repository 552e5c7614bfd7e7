package lanes

import (
	"bytes"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"
)

// TestAssemblyIsCurrent runs the generator and compares what it writes with what
// is committed. It is skipped only where the go command or the generator's
// modules cannot be had; with CI set in the environment that is an error.
func TestAssemblyIsCurrent(t *testing.T) {
	goTool, err := exec.LookPath("go")
	if err != nil {
		missing(t, "the go command: %v", err)
	}
	if out, err := command(goTool, "-C", "_asm", "mod", "download").CombinedOutput(); err != nil {
		missing(t, "the generator's modules: %v\n%s", err, out)
	}
	// The command line goes into the header, so it must be the one of go:generate.
	work := filepath.Join(t.TempDir(), "work")
	if err := os.Mkdir(work, 0o777); err != nil {
		t.Fatal(err)
	}
	generator := filepath.Join(work, "asm")
	if out, err := command(goTool, "-C", "_asm", "build", "-o", generator, ".").CombinedOutput(); err != nil {
		t.Fatalf("the generator does not build: %v\n%s", err, out)
	}
	run := exec.Command(generator, "-out", "../passes_amd64.s", "-stubs", "../passes_amd64.go", "-pkg", "lanes")
	run.Dir = work
	if out, err := run.CombinedOutput(); err != nil {
		t.Fatalf("the generator fails: %v\n%s", err, out)
	}
	for _, name := range []string{"passes_amd64.s", "passes_amd64.go"} {
		compareFiles(t, name, filepath.Join(work, "..", name))
	}
}

// command runs for this machine, whatever the tests are built for, and without
// the flags of this build.
func command(name string, args ...string) *exec.Cmd {
	c := exec.Command(name, args...)
	c.Env = append(os.Environ(), "GOFLAGS=-mod=readonly -buildvcs=false", "GOWORK=off", "GOOS=", "GOARCH=")
	return c
}

func missing(t *testing.T, format string, args ...any) {
	t.Helper()
	if os.Getenv("CI") != "" {
		t.Fatalf("missing: "+format, args...)
	}
	t.Skipf("missing: "+format, args...)
}

func compareFiles(t *testing.T, committed, fresh string) {
	t.Helper()
	have, err := os.ReadFile(committed)
	if err != nil {
		t.Fatal(err)
	}
	want, err := os.ReadFile(fresh)
	if err != nil {
		t.Fatal(err)
	}
	if bytes.Equal(have, want) {
		return
	}
	wantLines := strings.Split(string(want), "\n")
	for i, line := range strings.Split(string(have), "\n") {
		if i >= len(wantLines) || line != wantLines[i] {
			t.Errorf("%s is not what the generator writes, from line %d on: run go generate", committed, i+1)
			return
		}
	}
	t.Errorf("%s is shorter than what the generator writes: run go generate", committed)
}

// TestPuregoHasNoAssembly: the tag leaves plain Go only.
func TestPuregoHasNoAssembly(t *testing.T) {
	goTool, err := exec.LookPath("go")
	if err != nil {
		missing(t, "the go command: %v", err)
	}
	for tag, want := range map[string]string{"purego": "", "none": "passes_amd64.s"} {
		list := command(goTool, "list", "-tags", tag, "-f", "{{join .SFiles \" \"}}", ".")
		list.Env = append(list.Env, "GOARCH=amd64")
		out, err := list.Output()
		if err != nil {
			t.Fatalf("go list: %v", err)
		}
		if got := strings.TrimSpace(string(out)); got != want {
			t.Errorf("with the tag %s the assembly is %q, want %q", tag, got, want)
		}
	}
}
