package batch

import (
	"fmt"
	"os"
	"path/filepath"
)

// reserve is kept free on top of what outputs take: records, folders, temporary
// files.
const reserve = 1 << 20

// refuseFullDisk compares the space that outputs will take with what is free. A
// batch that goes on in spite of it would fail halfway; outputs that are replaced
// give their space back only afterwards, so they do not count.
func (p *Plan) refuseFullDisk() error {
	var need, removed int64
	for _, j := range p.Jobs {
		if !j.Done {
			need, removed = need+j.Need, removed+j.NeedRemoved
		}
	}
	if removed > 0 && sameVolume(existing(p.Options.Out), existing(p.Options.Removed)) {
		need, removed = need+removed, 0
	}
	if err := p.refuseFull("output folder", p.Options.Out, need, "--out"); err != nil {
		return err
	}
	return p.refuseFull("folder for what is removed", p.Options.Removed, removed, "--removed")
}

func (p *Plan) refuseFull(what, folder string, need int64, flag string) error {
	if need == 0 {
		return nil
	}
	free, ok := freeSpace(existing(folder))
	free += p.reclaimed(existing(folder))
	if !ok || free >= need+reserve {
		return nil
	}
	return fmt.Errorf("the %s %s: about %s will be written there, and %s are free; make room, or choose another folder for %s",
		what, folder, megabytes(need), megabytes(free), flag)
}

// reclaimed is what becomes free on a folder's file system when the files of a run
// that was killed are swept away.
func (p *Plan) reclaimed(folder string) int64 {
	sum := int64(0)
	for _, path := range p.leftovers() {
		if info, err := os.Stat(path); err == nil && sameVolume(path, folder) {
			sum += info.Size()
		}
	}
	return sum
}

// existing is the nearest folder above path, or itself, that is there.
func existing(path string) string {
	for {
		if _, err := os.Stat(path); err == nil {
			return path
		}
		parent := filepath.Dir(path)
		if parent == path {
			return path
		}
		path = parent
	}
}

func megabytes(n int64) string { return fmt.Sprintf("%.1f MB", float64(n)/1e6) }
