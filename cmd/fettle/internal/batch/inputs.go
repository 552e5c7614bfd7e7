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

// Problems are several errors of equal rank, such as one a recording.
type Problems []error

func (p Problems) Error() string   { return errors.Join(p...).Error() }
func (p Problems) Unwrap() []error { return p }

// Gather finds the recordings that files, folders and ** patterns name,
// sorted by output path. Of folders and patterns it takes what ends in .wav or
// .wave, hidden ones, other output folders and anything below the folders aside
// left out; a file named outright is taken whatever its ending. Links are followed
// to files, and to a folder that is named outright. problems are what is named but
// cannot be taken. It fails when there is nothing else.
func Gather(args []string, aside ...string) (inputs []Input, problems Problems, err error) {
	g := gatherer{seen: map[string]bool{}, folders: folderNames{}}
	for _, folder := range aside {
		if folder != "" {
			g.aside = append(g.aside, absolute(folder))
		}
	}
	for _, arg := range args {
		g.add(arg)
	}
	switch {
	case len(g.inputs) > 0:
	case len(g.problems) > 0:
		return nil, nil, g.problems
	default:
		return nil, nil, fmt.Errorf("%w: no .wav or .wave file in %s; check the names", ErrNoInput, strings.Join(args, ", "))
	}
	slices.SortFunc(g.inputs, func(a, b Input) int { return strings.Compare(a.Rel, b.Rel) })
	return g.inputs, g.problems, nil
}

type gatherer struct {
	inputs   []Input
	problems Problems
	seen     map[string]bool
	folders  folderNames
	aside    []string
}

func (g *gatherer) problem(path string, err error, todo string) {
	g.problems = append(g.problems, fmt.Errorf("%s: %w; %s", path, cause(err), todo))
}

func (g *gatherer) add(arg string) {
	info, err := os.Stat(arg)
	switch {
	case err == nil && info.IsDir():
		g.folder(arg)
	case err == nil:
		g.file(arg, filepath.Base(arg))
	case strings.ContainsAny(arg, "*?[{"):
		g.pattern(arg)
	case errors.Is(err, fs.ErrNotExist):
		g.problem(arg, errors.New("there is no such file or folder"), "check the name")
	default:
		g.problem(arg, err, "check the name and the permissions")
	}
}

// file takes a file once. One that cannot be examined is taken too: its
// failure is its own.
func (g *gatherer) file(path, rel string) {
	key := g.folders.absolute(path)
	if g.seen[key] {
		return
	}
	g.seen[key] = true
	if info, err := os.Stat(path); err == nil && !info.Mode().IsRegular() {
		g.problem(path, errors.New("is neither a file nor a folder"), "copy the recording to a file")
		return
	}
	g.inputs = append(g.inputs, Input{path, rel})
}

// folder walks a folder without following links to other folders.
func (g *gatherer) folder(root string) {
	_ = filepath.WalkDir(linked(root), func(path string, e fs.DirEntry, err error) error {
		if err != nil {
			g.problem(path, err, "check its permissions; the rest goes on without it")
			return nil
		}
		rel, _ := filepath.Rel(root, path) // path is below root
		hidden := rel != "." && strings.HasPrefix(e.Name(), ".")
		switch {
		case e.IsDir() && rel != "." && (hidden || slices.Contains(g.aside, absolute(path)) || isTreated(path)):
			return fs.SkipDir
		case !e.IsDir() && !hidden && isWAV(path) && !isFolder(path):
			g.file(path, rel)
		}
		return nil
	})
}

// linked makes a walk begin below root, be root a link or not.
func linked(root string) string {
	if info, err := os.Lstat(root); err == nil && info.Mode()&fs.ModeSymlink != 0 {
		return root + string(filepath.Separator)
	}
	return root
}

func (g *gatherer) pattern(arg string) {
	base, _ := doublestar.SplitPattern(filepath.ToSlash(arg))
	// Where all of it lies in one of these, outputs have yet to meet their originals.
	aside := slices.DeleteFunc(slices.Clone(g.aside), func(folder string) bool {
		from := absolute(base)
		return from == folder || isBelow(from, folder)
	})
	found := 0
	for _, path := range g.matches(arg) {
		rel, err := filepath.Rel(base, path)
		switch {
		case err != nil || !filepath.IsLocal(rel):
			g.problem(path, errors.New("is not below the part of the pattern before its first *"), "write the pattern without .. behind a *")
		case isWAV(path) && !isFolder(path) && !slices.ContainsFunc(aside, func(folder string) bool { return isBelow(g.folders.absolute(path), folder) }):
			g.file(path, rel)
		default:
			continue
		}
		found++
	}
	if found == 0 {
		g.problem(arg, errors.New("the pattern matches no .wav or .wave file"), "check it")
	}
}

// matches does not follow links to folders, which may lead in circles.
func (g *gatherer) matches(pattern string) []string {
	options := []doublestar.GlobOption{doublestar.WithNoFollow(), doublestar.WithNoHidden()}
	paths, err := doublestar.FilepathGlob(pattern, append(options, doublestar.WithFailOnIOErrors())...)
	if err == nil {
		return paths
	}
	g.problem(pattern, err, "check the pattern and the permissions; the rest goes on without it")
	paths, _ = doublestar.FilepathGlob(pattern, options...)
	return paths
}

func isBelow(path, folder string) bool {
	return strings.HasPrefix(path, strings.TrimSuffix(folder, string(filepath.Separator))+string(filepath.Separator))
}

func isFolder(path string) bool {
	info, err := os.Stat(path)
	return err == nil && info.IsDir()
}

func isWAV(path string) bool {
	switch strings.ToLower(filepath.Ext(path)) {
	case ".wav", ".wave":
		return true
	}
	return false
}

// cause strips the path that a file system error repeats.
func cause(err error) error {
	var p *fs.PathError
	if errors.As(err, &p) {
		return p.Err
	}
	return err
}
