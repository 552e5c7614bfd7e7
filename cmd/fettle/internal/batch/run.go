package batch

import (
	"context"
	"errors"
	"fmt"
	"path/filepath"
	"sync"

	"fettle/filter"
)

// Progress is told how a run goes. Its methods are called from several
// goroutines at once.
type Progress interface {
	// Bytes adds input bytes that were read.
	Bytes(n int64)
	// Finished tells that a recording is done or has failed (err not nil).
	Finished(j *Job, err error)
}

// Summary is what became of a batch.
type Summary struct {
	Done, Failed, Skipped int
	Failures              []error // in the order of the plan
	Warnings              int     // recordings done with warnings
}

// Filter gives the chain realised at a rate, made once and shared.
func (p *Plan) Filter(rate int) (*filter.Filter, error) { return p.filters().at(rate) }

func (p *Plan) filters() *filters {
	p.once.Do(func() { p.made = newFilters(p.Chain, p.Options.Phase) })
	return p.made
}

// Run treats every recording that is not done, several at once. A recording's
// failure is counted and the rest go on; the error returned is of the batch as
// a whole: a record that cannot be written, or ctx's own when it was cancelled,
// in which case nothing half-done is left behind.
func (p *Plan) Run(ctx context.Context, progress Progress) (*Summary, error) {
	rec, err := openRecord(p.recordPath())
	if err != nil {
		return nil, err
	}
	ctx, stop := context.WithCancelCause(ctx)
	defer stop(nil)
	results := make([]result, len(p.Jobs))
	work := make(chan int)
	var wg sync.WaitGroup
	for range max(1, p.Options.Jobs) {
		wg.Go(func() {
			for i := range work {
				results[i] = p.treat(ctx, p.Jobs[i], progress)
				if err := p.keep(rec, &results[i]); err != nil {
					stop(err)
				}
				progress.Finished(p.Jobs[i], results[i].err)
			}
		})
	}
	p.feed(ctx, work)
	wg.Wait()
	s := p.sum(results)
	return s, errors.Join(context.Cause(ctx), rec.close())
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

// keep appends a result to the record.
func (p *Plan) keep(rec *record, r *result) error {
	if r.entry == nil {
		return nil
	}
	return rec.append(r.entry)
}

func (p *Plan) sum(results []result) *Summary {
	s := &Summary{}
	for _, err := range p.Problems {
		s.Failed++
		s.Failures = append(s.Failures, err)
	}
	for i, r := range results {
		switch {
		case p.Jobs[i].Done:
			s.Skipped++
		case r.entry == nil:
		case r.err != nil:
			s.Failed++
			s.Failures = append(s.Failures, r.err)
		default:
			s.Done++
			if len(r.entry.Warnings) > 0 {
				s.Warnings++
			}
		}
	}
	return s
}

// treat renders one job and describes it for the record.
func (p *Plan) treat(ctx context.Context, j *Job, progress Progress) result {
	e := p.newEntry(j)
	err := p.render(ctx, j, e, progress)
	if ctx.Err() != nil && err != nil {
		return result{}
	}
	if err != nil {
		e.Status, e.Error = StatusFailed, err.Error()
		err = fmt.Errorf("%w", err)
	}
	return result{e, err}
}

func (p *Plan) newEntry(j *Job) *Entry {
	return &Entry{
		Schema: RecordSchema, Version: p.Options.Version, Status: StatusDone,
		Input: absolute(j.Path), Output: filepath.ToSlash(j.Rel),
		Chain: p.Chain.Name, ChainSHA256: fmt.Sprintf("%x", p.Chain.SHA256), Settings: p.settings(),
		Edges: string(p.Chain.Edges), Kernel: filter.KernelName, Warnings: []string{},
	}
}
