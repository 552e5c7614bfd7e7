package batch

import (
	"context"
	"errors"
	"fmt"
	"io/fs"
	"path/filepath"
	"sync"

	"fettle/audio"
)

// Verified is what Verify found.
type Verified struct {
	Outputs  int      // as they were recorded
	Failures Problems // outputs that are not, in order
	// Strangers are recordings in the folder that no record names.
	Strangers []string
}

// Check is what Verify looks at.
type Check struct {
	Originals bool // the originals too
	Jobs      int  // files at once
}

// Verify compares a treated folder with its record: every output is there, whole
// and unchanged since, and so is what was removed. Of an output that was treated
// more than once, the last entry counts.
func Verify(ctx context.Context, folder string, c Check) (*Verified, error) {
	if len(recordsIn(folder)) == 0 {
		return nil, fmt.Errorf("%s: there is no %s; name a folder that render wrote to", folder, RecordName)
	}
	past, err := readPast(folder)
	if err != nil {
		return nil, err
	}
	entries := sorted(past)
	found := make([]error, len(entries))
	work := make(chan int)
	var wg sync.WaitGroup
	for range max(1, c.Jobs) {
		wg.Go(func() {
			for i := range work {
				found[i] = verifyEntry(folder, entries[i], c.Originals)
			}
		})
	}
	for i := range entries {
		select {
		case work <- i:
			continue
		case <-ctx.Done():
		}
		break
	}
	close(work)
	wg.Wait()
	v := &Verified{Strangers: strangers(folder, past)}
	for i, e := range entries {
		switch {
		case found[i] != nil:
			v.Failures = append(v.Failures, found[i])
		case e.Status == StatusDone:
			v.Outputs++
		}
	}
	return v, ctx.Err()
}

// verifyEntry says what is wrong with the files of an entry.
func verifyEntry(folder string, e *Entry, originals bool) error {
	if e.Status != StatusDone {
		return fmt.Errorf("%s: is not treated: %s", filepath.Join(folder, string(e.Output)), e.Error)
	}
	output := filepath.Join(folder, filepath.FromSlash(string(e.Output)))
	err := sameAs(output, e.SHA256Out, "render it again, with --rehash")
	if err == nil {
		err = hasFrames(output, e.Frames)
	}
	if e.Removed != "" {
		err = errors.Join(err, sameAs(string(e.Removed), e.SHA256Removed, "render it again, with --rehash"))
	}
	if originals {
		err = errors.Join(err, sameAs(string(e.Input), e.SHA256In, "find the original that was treated"))
	}
	return err
}

func sameAs(path, want, todo string) error {
	sum, _, err := hashFile(path)
	if err != nil {
		return fmt.Errorf("%s: cannot be read: %w; %s", path, cause(err), todo)
	}
	if sum != want {
		return fmt.Errorf("%s: is not what the record says: SHA-256 %s, recorded %s; %s", path, sum, want, todo)
	}
	return nil
}

// hasFrames checks that a file reads as a recording of so many frames.
func hasFrames(path string, want int64) error {
	r, err := audio.Open(path)
	if err != nil {
		return err
	}
	defer r.Close()
	if r.Frames() != want {
		return fmt.Errorf("%s: has %d frames, the record says %d; render it again, with --rehash", path, r.Frames(), want)
	}
	return nil
}

// strangers lists the recordings below a folder that no entry names, and
// temporary files that a killed run left.
func strangers(folder string, past map[string]*Entry) []string {
	var out []string
	removed := removedFiles(past)
	_ = filepath.WalkDir(folder, func(path string, e fs.DirEntry, err error) error {
		if err != nil || e.IsDir() {
			return nil // what cannot be looked into has failed as an output
		}
		rel, _ := filepath.Rel(folder, path)
		if past[rel] == nil && !removed[name(absolute(path))] && (isWAV(path) || isTemporary(path)) {
			out = append(out, path)
		}
		return nil
	})
	return out
}
