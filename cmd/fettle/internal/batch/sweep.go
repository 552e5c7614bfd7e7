package batch

import (
	"os"
	"path/filepath"
	"regexp"
	"strings"
)

// temporary is how the files are called that become outputs when they are whole:
// hidden, and with digits behind the output's name.
var temporary = regexp.MustCompile(`(?i)^\..+\.wave?[0-9]+$`)

func isTemporary(path string) bool { return temporary.MatchString(filepath.Base(path)) }

// sweep removes what a run that was killed left of the recordings that are about
// to be treated. What cannot be removed stays; verify tells of it.
func (p *Plan) sweep() {
	bases := map[string][]string{} // of outputs, by folder
	for _, j := range p.Jobs {
		for _, path := range []string{j.Output, p.removedPath(j)} {
			if path != "" {
				bases[filepath.Dir(path)] = append(bases[filepath.Dir(path)], filepath.Base(path))
			}
		}
	}
	for folder, names := range bases {
		sweepFolder(folder, names)
	}
}

func sweepFolder(folder string, outputs []string) {
	entries, err := os.ReadDir(folder)
	if err != nil {
		return // it is not there yet
	}
	ours := map[string]bool{}
	for _, o := range outputs {
		ours["."+o] = true
	}
	for _, e := range entries {
		name := e.Name()
		if stem := strings.TrimRight(name, "0123456789"); stem != name && ours[stem] {
			os.Remove(filepath.Join(folder, name))
		}
	}
}
