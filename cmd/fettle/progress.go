package main

import (
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

func newProgress(w io.Writer, plan *batch.Plan) *progress {
	f, ok := w.(*os.File)
	if !ok || !term.IsTerminal(int(f.Fd())) {
		return &progress{}
	}
	var bytes, files int64
	for _, j := range plan.Jobs {
		if !j.Done {
			bytes += j.Bytes
			files++
		}
	}
	p := &progress{bars: mpb.New(mpb.WithOutput(f), mpb.WithWidth(40))}
	p.bytes = p.bars.AddBar(bytes,
		mpb.PrependDecorators(decor.CountersKibiByte("% .1f of % .1f", decor.WCSyncWidth)),
		mpb.AppendDecorators(decor.AverageETA(decor.ET_STYLE_MMSS), decor.Name(" left")))
	p.files = p.bars.AddBar(files,
		mpb.PrependDecorators(decor.CountersNoUnit("%d of %d recordings", decor.WCSyncWidth)))
	return p
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

// close leaves the bars as they are: headers and failed recordings make the
// byte count fall short of its total.
func (p *progress) close() {
	if p.bars == nil {
		return
	}
	p.bytes.SetTotal(-1, true)
	p.files.SetTotal(-1, true)
	p.bars.Wait()
}
