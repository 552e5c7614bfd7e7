package batch

import (
	"crypto/sha256"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"sync"
	"unicode/utf8"

	"fettle/audio"
	"fettle/audio/pcm"
	"fettle/filter"
	"fettle/filter/stream/machine"
)

// Options is what the caller asks for beside the chain.
type Options struct {
	Out      string
	Phase    filter.Realisation
	Encoding *pcm.Encoding // nil: as each original
	Headroom Headroom
	Jobs     int
	Cores    int // to be used in all; what jobs leave over serves the single recording
	Kernel   machine.Kernel
	// KernelGiven: the kernel was asked for, and the record may hold others.
	KernelGiven bool
	Again       bool // redo what the record says is done
	Version     string
}

// Headroom says how outputs are kept within full scale.
type Headroom struct {
	DB  float64 // taken off every recording
	Fit bool    // take off what each recording needs
}

func (h Headroom) String() string {
	if h.Fit {
		return "fit"
	}
	return fmt.Sprintf("%g dB", h.DB)
}

// Job is one recording of a plan.
type Job struct {
	Input
	Output string // path
	Rate   int    // Hz, 0 when the header could not be read
	Bytes  int64
	Done   bool // the record says so, and nothing it depends on changed
}

// Plan is a batch that is ready to run.
type Plan struct {
	Chain    *filter.Chain
	Options  Options
	Jobs     []*Job
	Problems Problems // inputs that could not even be listed

	once sync.Once
	made *filters

	slots slots // of the run
}

// New plans a batch. It reads headers and the treatment record but writes
// nothing. It refuses inputs that would share an output and outputs that would
// land on an original.
func New(chain *filter.Chain, args []string, o Options) (*Plan, error) {
	inputs, problems, err := Gather(args, o.Out)
	if err != nil {
		return nil, err
	}
	p := &Plan{Chain: chain, Options: o, Problems: problems}
	for _, in := range inputs {
		p.Jobs = append(p.Jobs, &Job{Input: in, Output: filepath.Join(o.Out, in.Rel)})
	}
	if err := p.refuseHarm(); err != nil {
		return nil, err
	}
	past, err := readRecord(p.recordPath())
	if err != nil {
		return nil, err
	}
	if err := p.refuseStrangers(); err != nil {
		return nil, err
	}
	for _, j := range p.Jobs {
		j.inspect()
		j.Done = !o.Again && p.isDone(j, past[j.Rel])
	}
	return p, p.refuseMix(past)
}

// pending is how many recordings are still to be treated.
func (p *Plan) pending() int {
	n := 0
	for _, j := range p.Jobs {
		if !j.Done {
			n++
		}
	}
	return n
}

// refuseMix stops a batch from going on with another kernel than it began with,
// as on another machine, unless that is what was asked for.
func (p *Plan) refuseMix(past map[string]*Entry) error {
	o := p.Options
	if o.KernelGiven || o.Again || p.pending() == 0 {
		return nil
	}
	for _, j := range p.Jobs {
		if e := past[j.Rel]; j.Done && e.Kernel != o.Kernel.String() {
			return fmt.Errorf("the treatment record %s: %s was made with kernel %s, but this run would use %s, whose outputs differ by rounding; give --kernel %s to go on as before, --kernel %[4]s to mix them, or --again to treat all anew",
				p.recordPath(), j.Rel, e.Kernel, o.Kernel, e.Kernel)
		}
	}
	return nil
}

// Rates lists the rates of the recordings that are still to be treated.
func (p *Plan) Rates() []int {
	var out []int
	for _, j := range p.Jobs {
		if j.Rate > 0 && !j.Done && !slices.Contains(out, j.Rate) {
			out = append(out, j.Rate)
		}
	}
	slices.Sort(out)
	return out
}

// refuseHarm checks that every output is its own and none is an original.
func (p *Plan) refuseHarm() error {
	originals := map[string]*Job{}
	for _, j := range p.Jobs {
		originals[absolute(j.Path)] = j
	}
	outputs := map[string]*Job{}
	for _, j := range p.Jobs {
		key := folded(filepath.Join(absolute(filepath.Dir(j.Output)), filepath.Base(j.Output)))
		if other := outputs[key]; other != nil {
			return fmt.Errorf("%s: %s and %s would both become this output; treat them in batches of their own", j.Output, other.Path, j.Path)
		}
		outputs[key] = j
		if original := originals[absolute(j.Output)]; original != nil || sameFile(j.Output, j.Path) {
			return fmt.Errorf("%s: this output would replace an original, which is never written to; choose another folder for --out", j.Output)
		}
		if strings.EqualFold(j.Rel, RecordName) {
			return fmt.Errorf("%s: this output would replace the treatment record; give the recording another name", j.Output)
		}
	}
	return nil
}

// refuseStrangers stops a batch from replacing files that are not fettle's own:
// without a treatment record the output folder is somebody else's.
func (p *Plan) refuseStrangers() error {
	if _, err := os.Stat(p.recordPath()); err == nil || p.Options.Again {
		return nil
	}
	for _, j := range p.Jobs {
		if _, err := os.Lstat(j.Output); err == nil {
			return fmt.Errorf("%s: is there already, and the folder has no %s that says it is an output; choose another folder for --out, or replace it with --again", j.Output, RecordName)
		}
	}
	return nil
}

// folded makes names alike that differ by case, since not every file system
// tells a.wav from A.WAV. Those that do take names that are no text, too, and
// to lower the case of such would make different ones alike.
func folded(path string) string {
	if !utf8.ValidString(path) {
		return path
	}
	return strings.ToLower(path)
}

func sameFile(a, b string) bool {
	x, errX := os.Stat(a)
	y, errY := os.Stat(b)
	return errX == nil && errY == nil && os.SameFile(x, y)
}

// inspect reads the header for the rate; what is wrong with it comes up again
// when the job is run, and is reported there.
func (j *Job) inspect() {
	if info, err := os.Stat(j.Path); err == nil {
		j.Bytes = info.Size()
	}
	r, err := audio.Open(j.Path)
	if err != nil {
		return
	}
	defer r.Close()
	j.Rate = r.Format().SampleRate
}

// isDone compares what the record has of an earlier run with what is asked now.
func (p *Plan) isDone(j *Job, e *Entry) bool {
	if e == nil || e.Status != StatusDone || e.Input != name(absolute(j.Path)) {
		return false
	}
	in, err := os.Stat(j.Path)
	if err != nil || in.Size() != e.InputBytes || !in.ModTime().Equal(e.InputModified) {
		return false
	}
	out, err := os.Stat(j.Output)
	if err != nil || out.Size() != e.OutputBytes {
		return false
	}
	return e.Settings == p.settings()
}

// settings identifies all that decides an output beside its input.
func (p *Plan) settings() string {
	h := sha256.New()
	encoding := "as input"
	if p.Options.Encoding != nil {
		encoding = p.Options.Encoding.String()
	}
	fmt.Fprintf(h, "%x\nphase %s\nformat %s\nheadroom %s\nversion %s\n", p.Chain.SHA256, p.Options.Phase, encoding, p.Options.Headroom, p.Options.Version)
	return fmt.Sprintf("%x", h.Sum(nil)[:8])
}

func (p *Plan) recordPath() string { return filepath.Join(p.Options.Out, RecordName) }

// PrepareOut makes the output folder and proves that it can be written to.
func (p *Plan) PrepareOut() error {
	out := p.Options.Out
	if err := os.MkdirAll(out, 0o777); err != nil {
		return fmt.Errorf("the output folder %s: cannot be made: %w; choose another for --out", out, cause(err))
	}
	probe, err := os.CreateTemp(out, ".fettle-*")
	if err != nil {
		return fmt.Errorf("the output folder %s: cannot be written to: %w; check its permissions or choose another for --out", out, cause(err))
	}
	return errors.Join(probe.Close(), os.Remove(probe.Name()))
}
