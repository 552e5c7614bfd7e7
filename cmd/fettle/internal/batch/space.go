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
	need := int64(0)
	for _, j := range p.Jobs {
		if !j.Done {
			need += j.Need
		}
	}
	if need == 0 {
		return nil
	}
	free, ok := freeSpace(existing(p.Options.Out))
	if !ok || free >= need+reserve {
		return nil
	}
	return fmt.Errorf("the output folder %s: outputs will take about %s, and %s are free there; make room, or choose another folder for --out",
		p.Options.Out, megabytes(need), megabytes(free))
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
