package main

import (
	"fmt"
	"os"
	"path/filepath"
)

// root is where the recordings live, seen from the repository root.
const root = "samples/recordings"

func main() {
	if err := run(); err != nil {
		fmt.Fprintln(os.Stderr, "generate:", err)
		os.Exit(1)
	}
}

func run() error {
	if _, err := os.Stat(filepath.Dir(root)); err != nil {
		return fmt.Errorf("no folder %s here: %w; run from the repository root", filepath.Dir(root), err)
	}
	return generate(root)
}

// generate renders every scene into a file below dir, over an older one.
func generate(dir string) error {
	for _, s := range scenes {
		if err := writeWAV(filepath.Join(dir, filepath.FromSlash(s.path)), s, s.render()); err != nil {
			return err
		}
	}
	return nil
}
