package batch

import (
	"os"
	"path/filepath"
	"regexp"
	"strings"
)

// Files that become outputs when they are whole are hidden and have a random number
// of 63 bits behind the output's name. One in a million numbers is shorter than
// fewestDigits, which keeps hidden files out that are numbered or dated.
const (
	fewestDigits = 13
	mostDigits   = 19
)

var temporary = regexp.MustCompile(`(?i)^\..+\.wave?[0-9]{13,19}$`)

func isTemporary(path string) bool { return temporary.MatchString(filepath.Base(path)) }

// sweep removes what a run that was killed left behind. What cannot be removed
// stays; verify tells of it.
func (p *Plan) sweep() {
	for _, path := range p.leftovers() {
		os.Remove(path)
	}
}

// leftovers lists the temporary files of the recordings that are about to be
// treated, and of the record.
func (p *Plan) leftovers() []string {
	outputs := map[string]map[string]bool{} // names, by folder
	enter := func(path string) {
		folder, name := filepath.Split(path)
		if outputs[folder] == nil {
			outputs[folder] = map[string]bool{}
		}
		outputs[folder][name] = true
	}
	enter(filepath.Join(p.Options.Out, RecordName))
	for _, j := range p.Jobs {
		enter(j.Output)
		if path := p.removedPath(j); path != "" {
			enter(path)
		}
	}
	var out []string
	for folder, names := range outputs {
		entries, _ := os.ReadDir(filepath.Clean(folder)) // one that is not there yet holds none
		for _, e := range entries {
			if isTemporaryOf(e.Name(), names) {
				out = append(out, filepath.Join(folder, e.Name()))
			}
		}
	}
	return out
}

// isTemporaryOf tells whether a file is one of these outputs on its way. Their names
// may end in digits, too.
func isTemporaryOf(file string, outputs map[string]bool) bool {
	hidden, ok := strings.CutPrefix(file, ".")
	digits := len(hidden) - len(strings.TrimRight(hidden, "0123456789"))
	for n := fewestDigits; ok && n <= min(digits, mostDigits); n++ {
		if outputs[hidden[:len(hidden)-n]] {
			return true
		}
	}
	return false
}
