package main

import (
	"context"
	"fmt"
	"io"
	"os"

	"fettle/cmd/fettle/internal/batch"

	"github.com/vbauerster/mpb/v8"
	"github.com/vbauerster/mpb/v8/decor"
	"golang.org/x/term"
)

// progress shows a bar on a terminal: bytes read, files done, time left. In a
// pipe it shows nothing.
type progress struct {
	bars  *mpb.Progress
	bytes *mpb.Bar
	files *mpb.Bar
}

func newProgress(ctx context.Context, w io.Writer, plan *batch.Plan) *progress {
	bytes, files := toDo(plan)
	f, ok := w.(*os.File)
	if files == 0 || !ok || !term.IsTerminal(int(f.Fd())) {
		return &progress{}
	}
	// A terminal prints ^C where the cursor stands; the bars count on column 0.
	context.AfterFunc(ctx, func() { fmt.Fprint(f, "\r") })
	// With this width the longest line still fits 80 columns.
	p := &progress{bars: mpb.New(mpb.WithOutput(f), mpb.WithWidth(36))}
	p.bytes = p.bars.AddBar(bytes,
		mpb.PrependDecorators(decor.CountersKibiByte("% .1f of % .1f", decor.WCSyncWidth)),
		mpb.AppendDecorators(decor.AverageETA(decor.ET_STYLE_MMSS), decor.Name(" left")))
	p.files = p.bars.AddBar(files,
		mpb.PrependDecorators(decor.CountersNoUnit("%d of %d recordings", decor.WCSyncWidth)))
	return p
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
	if p.bars != nil {
		p.bytes.IncrInt64(n)
	}
}

func (p *progress) Finished(*batch.Job, error) {
	if p.bars != nil {
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
