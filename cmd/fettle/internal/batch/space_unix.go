//go:build unix

package batch

import (
	"os"

	"golang.org/x/sys/unix"
)

// writable says why files cannot be made in a folder.
func writable(folder string) error { return unix.Access(folder, unix.W_OK|unix.X_OK) }

// alone locks a file for as long as it is open, and tells whether nobody else
// has. Where a file system knows no locks everyone is taken to be alone.
func alone(f *os.File) bool {
	return unix.Flock(int(f.Fd()), unix.LOCK_EX|unix.LOCK_NB) != unix.EWOULDBLOCK
}

// sameVolume tells whether two paths lie in one file system.
func sameVolume(a, b string) bool {
	var x, y unix.Stat_t
	return unix.Stat(a, &x) == nil && unix.Stat(b, &y) == nil && x.Dev == y.Dev
}

// freeSpace is what an ordinary user may still write where path is, in bytes.
func freeSpace(path string) (int64, bool) {
	var s unix.Statfs_t
	if err := unix.Statfs(path, &s); err != nil {
		return 0, false
	}
	return int64(s.Bavail) * int64(s.Bsize), true
}
