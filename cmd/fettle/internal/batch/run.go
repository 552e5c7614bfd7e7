package batch

import (
	"context"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"sync"
	"time"

	"fettle/audio"
	"fettle/audio/container"
)

// Progress is told how a run goes. Its methods are called from several
// goroutines at once.
type Progress interface {
	// Bytes adds input bytes that were read.
	Bytes(n int64)
	// Finished tells that a recording is done or has failed (err not nil).
	Finished(j *Job, err error)
}

// Summary is what became of a batch, in numbers of recordings.
type Summary struct {
	Done, Skipped int
	Left          int      // not begun or not finished when the run was stopped
	Failures      Problems // what could not be listed, then in the order of the plan
	Warnings      Problems // of those done
}

// Failed is how many recordings, or places to look for them, failed.
func (s *Summary) Failed() int { return len(s.Failures) }

// Run treats every recording that is not done, several at once. A recording's
// failure is counted and the rest go on; the error returned is of the batch as
// a whole: a record that cannot be written, or ctx's own when it was cancelled,
// in which case nothing half-done is left behind.
func (p *Plan) Run(ctx context.Context, progress Progress) (*Summary, error) {
	rec, err := openRecord(p.recordPath())
	if err != nil {
		return nil, err
	}
	p.sweep()
	if err := p.adopt(rec); err != nil {
		return nil, errors.Join(err, rec.close())
	}
	s, err := p.treatAll(ctx, rec, progress)
	return s, errors.Join(err, rec.close())
}

// syncsAbreast is how many recordings may be on their way to the disk while
// others are rendered. File systems settle syncs that come together in one go.
// One job means one recording at a time, to the end.
const syncsAbreast = 16

// workers is how many recordings may be under way.
func (p *Plan) workers() int {
	if p.Options.Jobs <= 1 {
		return 1
	}
	return min(p.Options.Jobs+syncsAbreast, len(p.Jobs))
}

// slots bounds how many recordings are rendered at once.
type slots chan struct{}

func (s slots) enter() { s <- struct{}{} }
func (s slots) leave() { <-s }

func (p *Plan) treatAll(ctx context.Context, rec *record, progress Progress) (*Summary, error) {
	ctx, stop := context.WithCancelCause(ctx)
	defer stop(nil)
	begin, beginNoMore := context.WithCancel(ctx)
	defer beginNoMore()
	results := make([]result, len(p.Jobs))
	work := make(chan int)
	p.slots = make(slots, max(1, p.Options.Jobs))
	var wg sync.WaitGroup
	for range p.workers() {
		wg.Go(func() {
			for i := range work {
				var err error
				if results[i], err = p.treat(ctx, begin, p.Jobs[i], rec, progress); err != nil {
					stop(err)
				} else if results[i].err != nil && p.Options.StopOnError {
					beginNoMore()
				}
			}
		})
	}
	p.feed(begin, work)
	wg.Wait()
	p.removeEmptyFolders(results)
	return p.sum(results), context.Cause(ctx)
}

// coresEach is how many cores one recording may use.
func (p *Plan) coresEach() int {
	return p.Options.Cores / max(1, min(p.Options.Jobs, p.pending()))
}

// removeEmptyFolders takes away folders that were made for outputs that did
// not come about.
func (p *Plan) removeEmptyFolders(results []result) {
	if p.Options.Shard.Count > 0 {
		return // another shard may be about to use them
	}
	for i, r := range results {
		if p.Jobs[i].Done || r.entry != nil && r.err == nil {
			continue
		}
		removeEmpty(p.Options.Out, p.Jobs[i].Rel)
		if p.Options.Removed != "" {
			removeEmpty(p.Options.Removed, p.Jobs[i].Rel)
		}
	}
}

// removeEmpty takes away the folders below root that rel is in and that hold
// nothing.
func removeEmpty(root, rel string) {
	for rel = filepath.Dir(rel); rel != "."; rel = filepath.Dir(rel) {
		if os.Remove(filepath.Join(root, rel)) != nil {
			break // not empty, or not there
		}
	}
}

// feed hands out the jobs in order until the context ends.
func (p *Plan) feed(ctx context.Context, work chan<- int) {
	defer close(work)
	for i, j := range p.Jobs {
		if j.Done {
			continue
		}
		select {
		case work <- i:
		case <-ctx.Done():
			return
		}
	}
}

// result is what one job came to; entry is nil for one that was cancelled or
// never begun.
type result struct {
	entry *Entry
	err   error
}

func (p *Plan) sum(results []result) *Summary {
	s := &Summary{Failures: slices.Clone(p.Problems)}
	for i, r := range results {
		switch {
		case p.Jobs[i].Done:
			s.Skipped++
		case r.entry == nil:
			s.Left++
		case r.err != nil:
			s.Failures = append(s.Failures, r.err)
		default:
			s.Done++
			for _, w := range r.entry.Warnings {
				s.Warnings = append(s.Warnings, fmt.Errorf("%s: warning: %s", p.Jobs[i].Path, w))
			}
		}
	}
	return s
}

// treat renders one job, describes it for the record and appends that. It takes
// a slot, which render gives up as soon as only the disk is to be waited for, unless
// begin has ended by then. The error is the record's.
func (p *Plan) treat(ctx, begin context.Context, j *Job, rec *record, progress Progress) (result, error) {
	p.slots.enter() // goroutines that wait for a channel get it in their order
	if begin.Err() != nil {
		p.slots.leave()
		return result{}, nil
	}
	e := p.newEntry(j)
	err := p.render(ctx, j, e, progress)
	if err != nil && ctx.Err() != nil {
		return result{}, nil
	}
	if err != nil {
		e.Status, e.Error = StatusFailed, err.Error()
	}
	progress.Finished(j, err)
	return result{e, err}, rec.append(e)
}

func (p *Plan) newEntry(j *Job) *Entry {
	return &Entry{
		Schema: RecordSchema, Version: p.Options.Version, Status: StatusDone,
		Treated: time.Now().UTC().Truncate(time.Second),
		Input:   name(j.absolute), Output: name(filepath.ToSlash(j.Rel)),
		Chain: j.Chain.Name, ChainSHA256: fmt.Sprintf("%x", j.Chain.SHA256), Settings: p.settings(j),
		Shard: p.Options.Shard.String(), Batch: p.batch, BatchCount: p.count,
		Edges: string(j.Chain.Edges), Kernel: p.Options.Kernel.String(), Warnings: []string{},
		Kept: []container.Note{}, Corrected: []container.Note{}, Dropped: []container.Note{},
		HeadroomDB: p.Options.Headroom.DB, TruePeakOversampling: audio.TruePeakOversampling,
	}
}
