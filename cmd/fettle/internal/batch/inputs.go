package batch

import (
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"slices"
	"strings"

	"github.com/bmatcuk/doublestar/v4"
)

// Input is one recording to be treated.
type Input struct {
	Path string
	// Rel is where it goes below the output folder: the file's name, or its
	// path below the folder or the fixed part of the pattern that named it.
	Rel string
}

// ErrNoInput says that nothing matched.
var ErrNoInput = errors.New("no recording matched")

// Gather finds the recordings that files, folders and ** patterns name,
// sorted by output path. Of folders it takes files that end in .wav or .wave,
// hidden ones and anything below out left aside; a file named outright is
// taken whatever its ending. problems are folders that could not be read.
func Gather(args []string, out string) (inputs []Input, problems []error, err error) {
	g := gatherer{seen: map[string]bool{}, out: absolute(out)}
	for _, arg := range args {
		if err := g.add(arg); err != nil {
			return nil, nil, err
		}
	}
	if len(g.inputs) == 0 && len(g.problems) == 0 {
		return nil, nil, fmt.Errorf("%w: %s hold no .wav file; check the names, or quote a ** pattern", ErrNoInput, strings.Join(args, ", "))
	}
	slices.SortFunc(g.inputs, func(a, b Input) int { return strings.Compare(a.Rel, b.Rel) })
	return g.inputs, g.problems, nil
}

type gatherer struct {
	inputs   []Input
	problems []error
	seen     map[string]bool
	out      string
}

func (g *gatherer) add(arg string) error {
	info, err := os.Stat(arg)
	switch {
	case err == nil && info.IsDir():
		g.folder(arg)
		return nil
	case err == nil:
		g.file(arg, filepath.Base(arg))
		return nil
	case strings.ContainsAny(arg, "*?[{"):
		return g.pattern(arg)
	}
	// A missing file is that recording's failure, unless it is all there is.
	if errors.Is(err, fs.ErrNotExist) {
		return fmt.Errorf("%s: no such file or folder; check the name", arg)
	}
	g.problems = append(g.problems, fmt.Errorf("%s: %w", arg, cause(err)))
	return nil
}

func (g *gatherer) file(path, rel string) {
	if key := absolute(path); !g.seen[key] {
		g.seen[key] = true
		g.inputs = append(g.inputs, Input{path, rel})
	}
}

// folder walks a folder without following links to folders.
func (g *gatherer) folder(root string) {
	_ = filepath.WalkDir(root, func(path string, e fs.DirEntry, err error) error {
		if err != nil {
			g.problems = append(g.problems, fmt.Errorf("%s: %w", path, cause(err)))
			return nil
		}
		hidden := path != root && strings.HasPrefix(e.Name(), ".")
		if e.IsDir() {
			if hidden || absolute(path) == g.out && path != root {
				return fs.SkipDir
			}
			return nil
		}
		if !hidden && isWAV(path) {
			rel, err := filepath.Rel(root, path)
			if err != nil {
				return err
			}
			g.file(path, rel)
		}
		return nil
	})
}

func (g *gatherer) pattern(arg string) error {
	base, _ := doublestar.SplitPattern(filepath.ToSlash(arg))
	paths, err := doublestar.FilepathGlob(arg, doublestar.WithFilesOnly())
	if err != nil {
		return fmt.Errorf("the pattern %s: %w", arg, err)
	}
	for _, path := range paths {
		rel, err := filepath.Rel(base, path)
		if err != nil {
			return err
		}
		inOut := strings.HasPrefix(absolute(path), g.out+string(filepath.Separator))
		if isWAV(path) && !inOut && !strings.HasPrefix(filepath.Base(path), ".") {
			g.file(path, rel)
		}
	}
	return nil
}

func isWAV(path string) bool {
	switch strings.ToLower(filepath.Ext(path)) {
	case ".wav", ".wave":
		return true
	}
	return false
}

// absolute is a path's one name, links resolved as far as they exist.
func absolute(path string) string {
	abs, err := filepath.Abs(path)
	if err != nil {
		return filepath.Clean(path)
	}
	if real, err := filepath.EvalSymlinks(abs); err == nil {
		return real
	}
	return abs
}

// cause strips the path that a file system error repeats.
func cause(err error) error {
	var p *fs.PathError
	if errors.As(err, &p) {
		return p.Err
	}
	return err
}
