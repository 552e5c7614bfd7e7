package main

import (
	"context"
	"fmt"
	"io"
	"os"
	"sync"

	"fettle/cmd/fettle/internal/batch"

	"github.com/vbauerster/mpb/v8"
	"github.com/vbauerster/mpb/v8/decor"
	"golang.org/x/term"
)

// progress counts bytes read and files done. From start on it shows a bar for
// each on a terminal, and the time left; in a pipe it shows nothing.
type progress struct {
	plan         *batch.Plan
	mu           sync.Mutex
	read, done   int64 // until the bars are there
	bars         *mpb.Progress
	bytes, files *mpb.Bar
}

func newProgress(plan *batch.Plan) *progress { return &progress{plan: plan} }

// start shows the bars, at what was counted so far.
func (p *progress) start(ctx context.Context, w io.Writer) {
	bytes, files := toDo(p.plan)
	f, ok := w.(*os.File)
	if files == 0 || !ok || !term.IsTerminal(int(f.Fd())) {
		return
	}
	// A terminal prints ^C where the cursor stands; the bars count on column 0.
	context.AfterFunc(ctx, func() { fmt.Fprint(f, "\r") })
	p.mu.Lock()
	defer p.mu.Unlock()
	// With this width the longest line still fits 80 columns.
	p.bars = mpb.New(mpb.WithOutput(f), mpb.WithWidth(36))
	p.bytes = p.bars.AddBar(bytes,
		mpb.PrependDecorators(decor.CountersKibiByte("% .1f of % .1f", decor.WCSyncWidth)),
		mpb.AppendDecorators(decor.AverageETA(decor.ET_STYLE_MMSS), decor.Name(" left")))
	p.files = p.bars.AddBar(files,
		mpb.PrependDecorators(decor.CountersNoUnit("%d of %d recordings", decor.WCSyncWidth)))
	p.bytes.IncrInt64(p.read)
	p.files.IncrInt64(p.done)
}

func toDo(plan *batch.Plan) (bytes, files int64) {
	for _, j := range plan.Jobs {
		if !j.Done {
			bytes += j.Bytes
			files++
		}
	}
	return bytes, files
}

func (p *progress) Bytes(n int64) {
	p.mu.Lock()
	defer p.mu.Unlock()
	if p.read += n; p.bars != nil {
		p.bytes.IncrInt64(n)
	}
}

func (p *progress) Finished(*batch.Job, error) {
	p.mu.Lock()
	defer p.mu.Unlock()
	if p.done++; p.bars != nil {
		p.files.Increment()
	}
}

// close leaves the bars as they are. When all recordings are finished, so is
// the byte count, though headers and failed recordings make it fall short.
func (p *progress) close() {
	if p.bars == nil {
		return
	}
	if p.files.Completed() {
		p.bytes.SetTotal(-1, true)
	} else {
		p.bytes.Abort(false)
		p.files.Abort(false)
	}
	p.bars.Wait()
}
