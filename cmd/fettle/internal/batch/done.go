package batch

import (
	"crypto/sha256"
	"fmt"
	"os"
)

// isDone compares what the record has of an earlier run with what is asked now.
func (p *Plan) isDone(j *Job, e *Entry) bool {
	if e == nil || e.Status != StatusDone || e.Input != name(j.absolute) || e.Settings != p.settings(j) {
		return false
	}
	out, err := os.Stat(j.Output)
	if err != nil || out.Size() != e.OutputBytes {
		return false
	}
	if path := p.removedPath(j); path != "" && !p.isRemoved(path, e) {
		return false
	}
	if p.Options.Rehash {
		return hasHash(j.Path, e.SHA256In) && hasHash(j.Output, e.SHA256Out)
	}
	in, err := os.Stat(j.Path)
	return err == nil && in.Size() == e.InputBytes && in.ModTime().Equal(e.InputModified)
}

// isRemoved tells whether a file is what the record says was taken out.
func (p *Plan) isRemoved(path string, e *Entry) bool {
	if e.Removed != name(absolute(path)) {
		return false
	}
	if p.Options.Rehash {
		return hasHash(path, e.SHA256Removed)
	}
	_, err := os.Stat(path)
	return err == nil
}

// settings identifies all that decides an output beside its input.
func (p *Plan) settings(j *Job) string {
	h := sha256.New()
	encoding := "as input"
	if p.Options.Encoding != nil {
		encoding = p.Options.Encoding.String()
	}
	fmt.Fprintf(h, "%x\nphase %s\nformat %s\nheadroom %s\nstretch %s\nversion %s\n",
		j.Chain.SHA256, p.Options.Phase, encoding, p.Options.Headroom, p.Options.Stretch, p.Options.Version)
	return fmt.Sprintf("%x", h.Sum(nil)[:8])
}
