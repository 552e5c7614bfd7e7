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
	Frames int64
	Bytes  int64 // of the recording's file
	Need   int64 // bytes that its outputs will take, about
	Done   bool  // the record says so, and nothing it depends on changed
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
	j.Rate, j.Frames = r.Format().SampleRate, r.Frames()
	j.Need = j.Bytes + j.Frames*int64(r.Format().NumChannels*(p.encoding(r).Bytes-r.Encoding().Bytes))
	if p.Options.Removed != "" {
		j.Need += j.Frames * int64(r.Format().NumChannels*removedEncoding.Bytes)
	}
}

// removedPath is where what the chain takes out goes; "" for nowhere.
func (p *Plan) removedPath(j *Job) string {
	if p.Options.Removed == "" {
		return ""
	}
	return filepath.Join(p.Options.Removed, j.Rel)
}
