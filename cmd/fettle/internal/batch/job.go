package batch

import (
	"os"
	"path/filepath"

	"fettle/audio"
	"fettle/filter"
)

// Job is one recording of a plan.
type Job struct {
	Input
	Chain  *filter.Chain
	Output string // path
	Rate   int    // Hz, 0 when the header could not be read
	Frames int64  // that will be rendered
	Bytes  int64  // of the recording's file
	// Need and NeedRemoved are the bytes that the output, and what is removed, will
	// take, about.
	Need, NeedRemoved int64
	absolute          string // of Path
	Done              bool   // the record says so, and nothing it depends on changed
	past              *Entry // of an earlier run, or nil
}

// inspect reads the header; what is wrong with it comes up again when the job is
// run, and is reported there.
func (p *Plan) inspect(j *Job) {
	if info, err := os.Stat(j.Path); err == nil {
		j.Bytes = info.Size()
	}
	r, err := audio.Open(j.Path)
	if err != nil {
		return
	}
	defer r.Close()
	j.Rate = r.Format().SampleRate
	from, to, err := p.Options.Stretch.frames(j.Rate, r.Frames())
	if err != nil {
		return
	}
	j.Frames = to - from
	channels := int64(r.Format().NumChannels)
	beside := j.Bytes - r.Frames()*channels*int64(r.Encoding().Bytes)
	j.Need = beside + j.Frames*channels*int64(p.encoding(r).Bytes)
	if p.Options.Removed != "" {
		j.NeedRemoved = j.Frames * channels * int64(removedEncoding.Bytes)
	}
}

// removedPath is where what the chain takes out goes; "" for nowhere.
func (p *Plan) removedPath(j *Job) string {
	if p.Options.Removed == "" {
		return ""
	}
	return filepath.Join(p.Options.Removed, j.Rel)
}
