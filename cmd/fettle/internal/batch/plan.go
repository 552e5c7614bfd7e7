package batch

import (
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"sync"

	"fettle/audio/pcm"
	"fettle/filter"
	"fettle/filter/stream/machine"
)

// Options is what the caller asks for beside the chain.
type Options struct {
	Out      string
	Removed  string // folder for what the chain takes out; "": it is not kept
	Phase    filter.Realisation
	Encoding *pcm.Encoding // nil: as each original
	Headroom Headroom
	Stretch  Stretch
	Jobs     int
	Cores    int // to be used in all; what jobs leave over serves the single recording
	Kernel   machine.Kernel
	// KernelGiven: the kernel was asked for, and the record may hold others.
	KernelGiven bool
	Again       bool // redo what the record says is done
	Rehash      bool // compare contents, not sizes and times, to tell what is done
	StopOnError bool // begin no more once a recording has failed
	NoProof     bool // do not read outputs back
	Shard       Shard
	Version     string
	Limit       int64 // size in bytes beyond which outputs are RF64; 0: 4 GiB
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

// Plan is a batch, or a shard of one, that is ready to run.
type Plan struct {
	Options  Options
	Jobs     []*Job
	Problems Problems // inputs that could not even be listed

	batch string // identifies all recordings of the batch, other shards' too
	count int    // of them
	mu    sync.Mutex
	made  map[Use]func() (*filter.Filter, error)

	responses map[*filter.Path][]complex128 // see known
	slots     slots                         // of the run
}

// New plans a batch that puts everything through one chain. It reads headers and
// the treatment record but writes nothing. It refuses inputs that would share an
// output, outputs that would land on an original, and a disk that is too small.
func New(chain *filter.Chain, args []string, o Options) (*Plan, error) {
	found, problems, err := Gather(args, o.Out, o.Removed)
	if err != nil {
		return nil, err
	}
	p := &Plan{Options: o, Problems: problems}
	for _, in := range found {
		p.add(in, chain)
	}
	return p, p.prepare()
}

// NewFromList is New for a list; chains has one for each line.
func NewFromList(list string, listed []Listed, chains []*filter.Chain, o Options) (*Plan, error) {
	if len(listed) == 0 {
		return nil, fmt.Errorf("the list %s: %w; add lines below the first", list, ErrNoInput)
	}
	p := &Plan{Options: o}
	for i, in := range inputs(list, listed) {
		p.add(in, chains[i])
	}
	slices.SortStableFunc(p.Jobs, func(a, b *Job) int { return strings.Compare(a.Rel, b.Rel) })
	return p, p.prepare()
}

func (p *Plan) add(in Input, chain *filter.Chain) {
	in.Rel = p.Options.Stretch.rename(in.Rel)
	p.Jobs = append(p.Jobs, &Job{Input: in, Chain: chain, Output: filepath.Join(p.Options.Out, in.Rel)})
}

func (p *Plan) prepare() error {
	if err := p.refuseHarm(); err != nil {
		return err
	}
	for _, j := range p.Jobs {
		p.inspect(j)
	}
	p.batch, p.count = p.identify(), len(p.Jobs)
	p.Jobs = p.Options.Shard.share(p.Jobs)
	past, err := readPast(p.Options.Out)
	if err != nil {
		return err
	}
	if err := p.refuseStrangers(); err != nil {
		return err
	}
	for _, j := range p.Jobs {
		j.past = past[j.Rel]
		j.Done = !p.Options.Again && p.isDone(j, j.past)
	}
	return errors.Join(p.refuseMix(), p.refuseFullDisk())
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

// HasLimits tells whether a chain of the plan asks for any.
func (p *Plan) HasLimits() bool {
	return slices.ContainsFunc(p.Jobs, func(j *Job) bool { return len(j.Chain.Limits) > 0 })
}

func (p *Plan) recordPath() string {
	return filepath.Join(p.Options.Out, recordNameOf(p.Options.Shard))
}

// PrepareOut makes the output folders and checks that they can be written to.
func (p *Plan) PrepareOut() error {
	if err := prepareFolder(p.Options.Out, "output folder", "--out"); err != nil {
		return err
	}
	if p.Options.Removed == "" {
		return nil
	}
	if err := prepareFolder(p.Options.Removed, "folder for what is removed", "--removed"); err != nil {
		return err
	}
	return p.markRemoved()
}

func prepareFolder(path, what, flag string) error {
	if err := os.MkdirAll(path, 0o777); err != nil {
		return fmt.Errorf("the %s %s: cannot be made: %w; choose another for %s", what, path, cause(err), flag)
	}
	if err := writable(path); err != nil {
		return fmt.Errorf("the %s %s: cannot be written to: %w; check its permissions or choose another for %s", what, path, cause(err), flag)
	}
	return nil
}
