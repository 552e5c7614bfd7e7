// Package asmtest helps to test generated assembly: whether it is current, whether
// a build can do without it, and whether it stays inside the memory it is given.
package asmtest

import (
	"bytes"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"

	"fettle/audio/needs"
)

// Current runs a generator as go:generate does and compares what it writes with
// what is committed. module is the folder of the generator's module, program the
// package in it, and args its arguments, where -out and -stubs are followed by
// paths relative to the module. It skips only where the go command or the module's
// dependencies cannot be had; with CI set in the environment that is an error.
func Current(t *testing.T, module, program string, args ...string) {
	t.Helper()
	goTool := goCommand(t)
	if out, err := command(goTool, "-C", module, "mod", "download").CombinedOutput(); err != nil {
		needs.Missing(t, "missing: the generator's modules: %v\n%s", err, out)
	}
	// The arguments go into the header, so they must be those of go:generate.
	work := filepath.Join(t.TempDir(), "work")
	generator := filepath.Join(work, "generator")
	if out, err := command(goTool, "-C", module, "build", "-o", generator, program).CombinedOutput(); err != nil {
		t.Fatalf("the generator does not build: %v\n%s", err, out)
	}
	files := outputs(args)
	for _, name := range files {
		if err := os.MkdirAll(filepath.Dir(filepath.Join(work, name)), 0o777); err != nil {
			t.Fatal(err)
		}
	}
	run := exec.Command(generator, args...)
	run.Dir = work
	if out, err := run.CombinedOutput(); err != nil {
		t.Fatalf("the generator fails: %v\n%s", err, out)
	}
	for _, name := range files {
		compare(t, filepath.Join(module, name), filepath.Join(work, name))
	}
}

func outputs(args []string) (files []string) {
	for i, a := range args {
		if a == "-out" || a == "-stubs" {
			files = append(files, args[i+1])
		}
	}
	return files
}

// WithoutAssembly checks that the package in the current folder has the given
// assembly on amd64, and none with the tag purego.
func WithoutAssembly(t *testing.T, file string) {
	t.Helper()
	for tag, want := range map[string]string{"purego": "", "none": file} {
		list := command(goCommand(t), "list", "-tags", tag, "-f", `{{join .SFiles " "}}`, ".")
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

func goCommand(t *testing.T) string {
	t.Helper()
	path, err := exec.LookPath("go")
	if err != nil {
		needs.Missing(t, "missing: the go command: %v", err)
	}
	return path
}

// command runs for this machine, whatever the tests are built for, and without
// the flags of this build.
func command(name string, args ...string) *exec.Cmd {
	c := exec.Command(name, args...)
	c.Env = append(os.Environ(), "GOFLAGS=-mod=readonly -buildvcs=false", "GOWORK=off", "GOOS=", "GOARCH=")
	return c
}

func compare(t *testing.T, committed, fresh string) {
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
