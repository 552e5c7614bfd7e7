package batch

import (
	"context"
	"errors"
	"fmt"
	"io"
	"math"
	"os"
	"path/filepath"
	"slices"
	"sync"

	"fettle/audio"
	"fettle/audio/container"
	"fettle/audio/pcm"
	"fettle/filter"
)

// render treats one recording and fills in what the record says of it. It begins
// with a slot and ends without.
func (p *Plan) render(ctx context.Context, j *Job, e *Entry, progress Progress) error {
	leave := sync.OnceFunc(p.slots.leave)
	defer leave()
	rec, err := audio.Open(j.Path)
	if err != nil {
		return err
	}
	defer rec.Close()
	format := rec.Format()
	e.InputBytes, e.InputModified = rec.Size(), rec.ModTime().UTC()
	e.RateHz, e.Channels = format.SampleRate, format.NumChannels
	e.FormatIn, e.FormatOut = rec.Encoding().String(), p.encoding(rec).String()
	e.Warnings = append(e.Warnings, rec.Warnings()...)
	r := &rendering{plan: p, job: j, rec: rec, entry: e, progress: progress, leave: leave}
	if r.from, r.to, err = p.Options.Stretch.frames(format.SampleRate, rec.Frames()); err != nil {
		return fmt.Errorf("%s: %w", j.Path, err)
	}
	e.Frames = r.to - r.from
	if !p.Options.Stretch.none() {
		e.TrialFrom, e.TrialTo = &r.from, &r.to
	}
	if r.filter, err = p.Filter(Use{j.Chain, format.SampleRate}); err != nil {
		return fmt.Errorf("%s: %w", j.Path, err)
	}
	describe(e, r.filter)
	r.gain = math.Pow(10, -p.Options.Headroom.DB/20)
	return r.fit(ctx, r.pass(ctx))
}

// describe fills in what the filter is.
func describe(e *Entry, f *filter.Filter) {
	paths := f.Paths()
	e.Phase = string(f.Phase())
	for i, path := range paths {
		// Removed alike from all; what is left, of the channel that is worst off.
		if l := f.Latency(path); i == 0 || math.Abs(l.Residual) > math.Abs(e.ResidualSamples) {
			e.LatencySamples, e.ResidualSamples = l.Removed, l.Residual
		}
		for _, w := range path.Warnings {
			if !slices.Contains(e.Warnings, w) {
				e.Warnings = append(e.Warnings, w)
			}
		}
	}
}

// encoding is the output's sample format.
func (p *Plan) encoding(rec *audio.Recording) pcm.Encoding {
	if p.Options.Encoding != nil {
		return *p.Options.Encoding
	}
	return rec.Encoding()
}

// rendering is one recording on its way through.
type rendering struct {
	plan     *Plan
	job      *Job
	rec      *audio.Recording
	filter   *filter.Filter
	entry    *Entry
	progress Progress // nil on a second pass, whose bytes were counted
	from, to int64    // frames of the recording to be rendered
	gain     float64
	leave    func() // gives up the slot; may be called twice
}

// fit makes of an over what the options say: the headroom that is needed
// in all, or a second pass with it.
func (r *rendering) fit(ctx context.Context, err error) error {
	var over *audio.OverError
	if !errors.As(err, &over) {
		return err
	}
	options := r.plan.Options.Headroom
	if !options.Fit {
		over.HeadroomDB += options.DB
		return err
	}
	r.plan.slots.enter()
	r.leave = sync.OnceFunc(r.plan.slots.leave)
	defer r.leave()
	r.entry.HeadroomDB = roundUp(over.HeadroomDB)
	r.gain, r.progress = math.Pow(10, -r.entry.HeadroomDB/20), nil
	return r.pass(ctx)
}

// roundUp takes a level to the next tenth of a dB, the figure that is written
// down being the figure that was used.
func roundUp(db float64) float64 { return math.Ceil(db*10) / 10 }

// pass reads, filters and writes the recording once. On any error no output
// appears.
func (r *rendering) pass(ctx context.Context) error {
	slabs, before, err := r.filtered()
	if err != nil {
		return fmt.Errorf("%s: %w", r.job.Path, err)
	}
	outputs, err := r.create()
	if err != nil {
		return err
	}
	err = (&flow{ctx: ctx, slabs: slabs, outputs: outputs}).run(r.workers())
	if err == nil {
		r.entry.SHA256In, err = r.rec.SHA256()
	}
	if err != nil {
		return errors.Join(err, outputs.abort())
	}
	r.entry.PeakIn, r.entry.TruePeakIn = levels(before)
	r.entry.PeakOut, r.entry.TruePeakOut = levels(outputs.meter)
	r.leave()
	return outputs.commit(r.entry)
}

// workers is how many goroutines share the recording.
func (r *rendering) workers() int {
	return max(1, min(r.plan.coresEach(), int(r.entry.Frames/share)))
}

// filtered gives what is to be rendered, with its context, as it comes out of the
// filter, and the meter of what goes in.
func (r *rendering) filtered() (*filter.Slabs, *audio.Meter, error) {
	setup := r.filter.Setup()
	setup.Kernel = r.plan.Options.Kernel
	ahead, behind := r.context()
	src, err := newSection(r.rec, r.from-ahead, r.to+behind)
	if err != nil {
		return nil, nil, err
	}
	in := &metered{Source: src, meter: audio.NewMeter(r.rec.Format().NumChannels), span: span{ahead, r.to - r.from}}
	if r.progress != nil {
		in.progress, in.frameBytes = r.progress, int64(r.rec.Encoding().Bytes*r.rec.Format().NumChannels)
	}
	slabs, err := r.filter.Slabs(in, setup)
	return slabs, in.meter, err
}

// context is how many frames before and after a stretch are filtered with it, so
// that it comes out as it would of the whole recording.
func (r *rendering) context() (before, after int64) {
	before, after = reach(r.filter)
	length := r.rec.Frames()
	if r.job.Chain.Edges == filter.Mirror {
		// What stands before the first frame and after the last is a reflection, and
		// comes from as far inside.
		before, after = max(before, r.from-(length-1)+(r.to-1+after)-(length-1)), max(after, before-r.from-(r.to-1))
	}
	return min(before, r.from), min(after, length-r.to)
}

// create begins all that a recording becomes.
func (r *rendering) create() (*outputs, error) {
	ahead, _ := r.context()
	o := &outputs{rec: r.rec, meter: audio.NewMeter(r.rec.Format().NumChannels), span: span{ahead, r.to - r.from}, gain: r.gain}
	spec, err := r.spec()
	if err != nil {
		return nil, err
	}
	w, err := createIn(r.job.Output, "--out", spec)
	if err != nil {
		return nil, err
	}
	w.Readers(r.workers())
	o.writer, o.path = w, r.job.Output
	if path := r.plan.removedPath(r.job); path != "" {
		if o.removed, err = newRemoval(path, r.job.Path, r.from, r.to); err != nil {
			return nil, errors.Join(err, o.abort())
		}
	}
	return o, nil
}

// createIn begins a file and makes its folder.
func createIn(path, flag string, spec audio.Spec) (*audio.Writer, error) {
	if err := os.MkdirAll(filepath.Dir(path), 0o777); err != nil {
		return nil, fmt.Errorf("%s: its folder cannot be made: %w; choose another for %s", path, cause(err), flag)
	}
	return audio.Create(path, spec)
}

// spec describes the output file. An unchanged sample format keeps the
// original's own description, and with it valid bits and speaker positions.
func (r *rendering) spec() (audio.Spec, error) {
	format, encoding := r.rec.Format(), r.plan.encoding(r.rec)
	s := audio.Spec{Rate: format.SampleRate, Channels: format.NumChannels, Encoding: encoding, Frames: r.to - r.from, Limit: r.plan.Options.Limit, Mode: 0o666}
	if encoding == r.rec.Encoding() {
		s.FmtChunk = r.rec.Layout().Fmt
	}
	s.Dither = r.dither(encoding)
	if !r.plan.Options.NoProof {
		s.Proof = r.prove
	}
	return s, r.carry(&s)
}

// carry takes over what else the original holds, as far as it stays true.
func (r *rendering) carry(s *audio.Spec) error {
	c, err := r.rec.Carry(container.Change{
		Format: s.Format(), From: r.from, Frames: s.Frames,
		Samples: r.gain != 1 || !r.untouched(), Text: r.history(),
	})
	if err != nil {
		return err
	}
	s.Carriage = c
	r.entry.Kept, r.entry.Corrected, r.entry.Dropped = c.Kept, c.Corrected, c.Dropped
	return nil
}

// untouched tells whether no channel's samples change.
func (r *rendering) untouched() bool {
	for c := range r.rec.Format().NumChannels {
		if !r.filter.Untouched(c + 1) {
			return false
		}
	}
	return true
}

// history says in a coding history what was done.
func (r *rendering) history() string {
	text := fmt.Sprintf("fettle %s; chain %s %.8s; %s", r.plan.Options.Version, r.job.Chain.Name, r.entry.ChainSHA256, r.filter.Phase())
	if r.entry.Dither != "none" {
		text += "; dither TPDF"
	}
	return text
}

// dither gives one to every channel that is requantised.
func (r *rendering) dither(to pcm.Encoding) []*pcm.Dither {
	r.entry.Dither = "none"
	if to.Float {
		return nil
	}
	from := r.rec.Encoding()
	channels := r.rec.Format().NumChannels
	out := make([]*pcm.Dither, channels)
	for c := range out {
		exact := r.filter.Untouched(c+1) && r.gain == 1 && !from.Float && from.Bits <= to.Bits
		if !exact {
			out[c] = pcm.NewDither(r.job.Chain.SHA256, filepath.ToSlash(r.job.Rel), c)
			r.entry.Dither = "TPDF"
		}
	}
	return out
}

// levels gives sample peak and true peak in dB, nil for silence.
func levels(m *audio.Meter) (peak, truePeak *float64) {
	return decibels(m.SamplePeak()), decibels(m.TruePeak())
}

func decibels(x float64) *float64 {
	if x == 0 {
		return nil
	}
	db := audio.DB(x)
	return &db
}

// outputs is all that a recording becomes: the output, and what was removed.
type outputs struct {
	rec     *audio.Recording
	path    string
	writer  *audio.Writer
	removed *removal // nil: not kept
	meter   *audio.Meter
	span    span // of what comes out of the filter
	gain    float64
}

func (o *outputs) channels() int { return o.rec.Format().NumChannels }

// write takes in a slab, scaled. frames is room for some.
func (o *outputs) write(slab *filter.Slab, frames []float64) error {
	for {
		n, err := slab.ReadFrames(frames)
		if err == io.EOF {
			return nil
		}
		if err != nil {
			return err
		}
		from, to := o.span.take(n)
		if err := o.add(frames[from*o.channels() : to*o.channels()]); err != nil {
			return err
		}
	}
}

func (o *outputs) add(frames []float64) error {
	if o.gain != 1 {
		for i := range frames {
			frames[i] *= o.gain
		}
	}
	o.meter.Add(frames)
	if err := o.writer.WriteFrames(frames); err != nil {
		return err
	}
	if o.removed != nil {
		return o.removed.add(frames, o.gain)
	}
	return nil
}

func (o *outputs) abort() error {
	err := o.writer.Abort()
	if o.removed != nil {
		err = errors.Join(err, o.removed.abort())
	}
	return err
}

// commit makes the files appear and enters them in the record. The output goes
// first: that it exceeds full scale shows here, and what an earlier run removed
// must outlast it.
func (o *outputs) commit(e *Entry) error {
	if err := o.writer.Commit(); err != nil {
		if o.removed != nil {
			err = errors.Join(err, o.removed.abort())
		}
		return err
	}
	if o.removed != nil {
		if err := o.removed.commit(e); err != nil {
			return errors.Join(err, os.Remove(o.path))
		}
	}
	info, err := os.Stat(o.path)
	if err != nil {
		return err
	}
	e.SHA256Out, e.OutputBytes = o.writer.SHA256(), info.Size()
	return nil
}
