package batch

import (
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"unicode/utf8"

	"golang.org/x/text/cases"
	"golang.org/x/text/unicode/norm"
)

// refuseHarm checks that every output is its own and none is an original.
func (p *Plan) refuseHarm() error {
	folders, originals, outputs := folderNames{}, map[string]*Job{}, map[string]*Job{}
	for _, j := range p.Jobs {
		j.absolute = folders.absolute(j.Path)
		originals[j.absolute] = j
	}
	for _, j := range p.Jobs {
		for _, output := range []string{j.Output, p.removedPath(j)} {
			if output == "" {
				continue
			}
			if err := p.refuseOutput(j, output, folders, originals, outputs); err != nil {
				return err
			}
		}
	}
	return nil
}

func (p *Plan) refuseOutput(j *Job, output string, folders folderNames, originals, outputs map[string]*Job) error {
	key := folded(filepath.Join(folders.absolute(filepath.Dir(output)), filepath.Base(output)))
	if other := outputs[key]; other == j {
		return fmt.Errorf("%s: the output and what is removed would both go there; choose another folder for --removed", output)
	} else if other != nil {
		return fmt.Errorf("%s: %s and %s would both become this output; treat them in batches of their own", output, other.Path, j.Path)
	}
	outputs[key] = j
	if original := originals[folders.absolute(output)]; original != nil || sameFile(output, j.Path) {
		return fmt.Errorf("%s: this output would replace an original, which is never written to; choose another folder", output)
	}
	if isRecordName(j.Rel) {
		return fmt.Errorf("%s: this output would replace a treatment record; give the recording another name", output)
	}
	return nil
}

// refuseStrangers stops a batch from replacing files that are not fettle's own:
// without its mark a folder is somebody else's.
func (p *Plan) refuseStrangers() error {
	if p.Options.Again {
		return nil
	}
	ours := len(recordsIn(p.Options.Out)) > 0
	oursToo := p.Options.Removed == "" || holdsRemoved(p.Options.Removed)
	for _, j := range p.Jobs {
		if !ours && isThere(j.Output) {
			return stranger(j.Output, p.Options.Out, RecordName)
		}
		if !oursToo && isThere(p.removedPath(j)) {
			return stranger(p.removedPath(j), p.Options.Removed, removedMark)
		}
	}
	return nil
}

func isThere(path string) bool {
	_, err := os.Lstat(path)
	return err == nil
}

func stranger(path, folder, mark string) error {
	return fmt.Errorf("%s: is there already, and %s has no %s that says it is an output; choose another folder, or replace it with --again", path, folder, mark)
}

// refuseMix stops a batch from going on with another kernel than it began with,
// as on another machine, unless that is what was asked for.
func (p *Plan) refuseMix() error {
	o := p.Options
	if o.KernelGiven || o.Again || p.pending() == 0 {
		return nil
	}
	for _, j := range p.Jobs {
		if e := j.past; j.Done && e.Kernel != o.Kernel.String() {
			return fmt.Errorf("the treatment record of %s: %s was made with kernel %s, but this run would use %s, whose outputs differ by rounding; give --kernel %[3]s to go on as before, --kernel %[4]s to mix them, or --again to treat all anew",
				o.Out, j.Rel, e.Kernel, o.Kernel)
		}
	}
	return nil
}

// folded makes paths alike whose names differ by case or by the form of their
// characters, since not every file system tells them apart. Those that do take
// names that are no text, too, which stay as they are.
func folded(path string) string {
	names := strings.Split(path, string(filepath.Separator))
	for i, n := range names {
		if utf8.ValidString(n) {
			names[i] = norm.NFC.String(cases.Fold().String(norm.NFD.String(n)))
		}
	}
	return strings.Join(names, string(filepath.Separator))
}

func sameFile(a, b string) bool {
	x, errX := os.Stat(a)
	y, errY := os.Stat(b)
	return errX == nil && errY == nil && os.SameFile(x, y)
}
