package batch

import (
	"io/fs"
	"os"
	"path/filepath"
)

// absolute is a path's one name, links resolved as far as it exists.
func absolute(path string) string {
	abs, err := filepath.Abs(path)
	if err != nil {
		return filepath.Clean(path)
	}
	if real, err := filepath.EvalSymlinks(abs); err == nil {
		return real
	}
	if parent := filepath.Dir(abs); parent != abs {
		return filepath.Join(absolute(parent), filepath.Base(abs))
	}
	return abs
}

// folderNames remembers the absolute names of folders, so that of the many files of one
// only each last name is looked at.
type folderNames map[string]string

// absolute is [absolute], which is asked once a folder.
func (f folderNames) absolute(path string) string {
	abs, err := filepath.Abs(path)
	if err != nil {
		return absolute(path)
	}
	parent := filepath.Dir(abs)
	if _, ok := f[parent]; !ok {
		f[parent] = absolute(parent)
	}
	abs = filepath.Join(f[parent], filepath.Base(abs))
	if info, err := os.Lstat(abs); err == nil && info.Mode()&fs.ModeSymlink != 0 {
		return absolute(abs)
	}
	return abs
}
