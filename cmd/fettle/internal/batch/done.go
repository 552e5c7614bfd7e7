package batch

import (
	"crypto/sha256"
	"fmt"
	"os"
)

// isDone compares what the record has of an earlier run with what is asked now.
func (p *Plan) isDone(j *Job, e *Entry) bool {
	if e == nil || e.Status != StatusDone || e.Input != name(absolute(j.Path)) || e.Settings != p.settings(j) {
		return false
	}
	out, err := os.Stat(j.Output)
	if err != nil || out.Size() != e.OutputBytes {
		return false
	}
	if path := p.removedPath(j); path != "" && e.Removed != name(absolute(path)) {
		return false
	}
	if p.Options.Rehash {
		return hasHash(j.Path, e.SHA256In) && hasHash(j.Output, e.SHA256Out)
	}
	in, err := os.Stat(j.Path)
	return err == nil && in.Size() == e.InputBytes && in.ModTime().Equal(e.InputModified)
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
