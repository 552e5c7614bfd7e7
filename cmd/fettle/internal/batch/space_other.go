//go:build !unix

package batch

import (
	"errors"
	"os"
)

// writable says why files cannot be made in a folder.
func writable(folder string) error {
	probe, err := os.CreateTemp(folder, ".fettle-*")
	if err != nil {
		return err
	}
	return errors.Join(probe.Close(), os.Remove(probe.Name()))
}

func sameVolume(string, string) bool { return false }

func freeSpace(string) (int64, bool) { return 0, false }

func alone(*os.File) bool { return true }
