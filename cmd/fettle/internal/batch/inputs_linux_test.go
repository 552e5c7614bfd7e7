package batch

import (
	"errors"
	"io/fs"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"syscall"
	"testing"
)

// withPermissions runs a test as a user whom permissions bind: they do not
// bind root. The thread that has changed its user ends with the goroutine.
func withPermissions(t *testing.T, test func()) {
	t.Helper()
	done := make(chan error)
	go func() {
		if os.Geteuid() == 0 {
			runtime.LockOSThread()
			const nobody = 65534
			if _, _, errno := syscall.RawSyscall(syscall.SYS_SETFSUID, nobody, 0, 0); errno != 0 {
				done <- errno
				return
			}
		}
		test()
		done <- nil
	}()
	mustDo(t, <-done)
}

// TestUnreadableFolder: it is a problem of its own, and the rest is found.
func TestUnreadableFolder(t *testing.T) {
	root := t.TempDir()
	recording(t, filepath.Join(root, "in/a.wav"), 1)
	recording(t, filepath.Join(root, "in/locked/b.wav"), 1)
	locked := filepath.Join(root, "in/locked")
	mustDo(t, os.Chmod(filepath.Dir(root), 0o755), os.Chmod(locked, 0))
	t.Cleanup(func() { mustDo(t, os.Chmod(locked, 0o700)) })
	for _, arg := range []string{"in", "in/**/*.wav"} {
		withPermissions(t, func() {
			inputs, problems, err := Gather([]string{filepath.Join(root, arg)}, filepath.Join(root, "out"))
			if err != nil || len(inputs) != 1 || inputs[0].Rel != "a.wav" {
				t.Errorf("%s: %+v, %v", arg, inputs, err)
			}
			if len(problems) != 1 || !errors.Is(problems[0], fs.ErrPermission) || !strings.Contains(problems[0].Error(), "goes on without it") {
				t.Errorf("%s: problems %q, want one of permission", arg, problems)
			}
		})
	}
	withPermissions(t, func() {
		_, _, err := Gather([]string{locked, filepath.Join(locked, "b.wav")}, filepath.Join(root, "out"))
		var problems Problems
		if !errors.As(err, &problems) || len(problems) != 2 || strings.Count(err.Error(), "permission denied") != 2 {
			t.Errorf("nothing but locked folders: %v", err)
		}
	})
}
