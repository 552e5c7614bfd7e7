package batch

import (
	"crypto/sha256"
	"fmt"
	"io"
	"os"
)

// hashFile gives a file's SHA-256 in lower-case hexadecimal, and its size.
func hashFile(path string) (sum string, size int64, err error) {
	f, err := os.Open(path)
	if err != nil {
		return "", 0, err
	}
	defer f.Close()
	h := sha256.New()
	size, err = io.Copy(h, f)
	return fmt.Sprintf("%x", h.Sum(nil)), size, err
}

func hasHash(path, want string) bool {
	sum, _, err := hashFile(path)
	return err == nil && sum == want
}
