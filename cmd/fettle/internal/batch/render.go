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
	"fettle/audio/pcm"
	"fettle/filter"
)

// block is how many frames are moved at a time.
const block = 16384

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
	e.RateHz, e.Channels, e.Frames = format.SampleRate, format.NumChannels, rec.Frames()
	e.FormatIn, e.FormatOut = rec.Encoding().String(), p.encoding(rec).String()
	e.Warnings = append(e.Warnings, rec.Warnings()...)
	f, err := p.Filter(format.SampleRate)
	if err != nil {
		return fmt.Errorf("%s: %w", j.Path, err)
	}
	p.describe(e, f)
	e.loud = len(e.Warnings)
	e.Warnings = append(e.Warnings, notCarried(rec)...)
	r := &rendering{plan: p, job: j, rec: rec, filter: f, entry: e, progress: progress, leave: leave}
	r.gain = math.Pow(10, -p.Options.Headroom.DB/20)
	return r.fit(ctx, r.pass(ctx))
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
	if err := r.rec.Rewind(); err != nil {
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

// describe fills in what the filter is.
func (p *Plan) describe(e *Entry, f *filter.Filter) {
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

// notCarried warns of chunks that stay behind: only sound is carried over.
func notCarried(rec *audio.Recording) []string {
	var ids []string
	for _, c := range rec.Layout().Chunks {
		switch c.ID {
		case "fmt ", "data", "fact", "JUNK", "PAD ", "FLLR":
		default:
			if !slices.Contains(ids, c.ID) {
				ids = append(ids, c.ID)
			}
		}
	}
	if ids == nil {
		return nil
	}
	return []string{fmt.Sprintf("not carried over: chunks %q; they stand in the original", ids)}
}

// rendering is one recording on its way through.
type rendering struct {
	plan     *Plan
	job      *Job
	rec      *audio.Recording
	filter   *filter.Filter
	entry    *Entry
	progress Progress // nil on a second pass, whose bytes were counted
	gain     float64
	leave    func() // gives up the slot; may be called twice
}

// pass reads, filters and writes the whole recording once. On any error the
// output does not appear.
func (r *rendering) pass(ctx context.Context) error {
	format := r.rec.Format()
	before := &metered{Source: r.rec, meter: audio.NewMeter(format.NumChannels)}
	if r.progress != nil {
		before.progress, before.frameBytes = r.progress, int64(r.rec.Encoding().Bytes*format.NumChannels)
	}
	out, rest, err := r.filtered(before)
	if err != nil {
		return fmt.Errorf("%s: %w", r.job.Path, err)
	}
	defer rest()
	w, err := r.create()
	if err != nil {
		return err
	}
	after := audio.NewMeter(format.NumChannels)
	err = r.copy(ctx, w, out, after)
	rest()
	if err == nil {
		r.entry.SHA256In, err = r.rec.SHA256()
	}
	if err != nil {
		return errors.Join(err, w.Abort())
	}
	r.entry.PeakIn, r.entry.TruePeakIn = levels(before.meter)
	r.entry.PeakOut, r.entry.TruePeakOut = levels(after)
	return r.commit(w)
}

// filtered gives the recording as it comes out of the filter. Where there are
// cores to spare, reading and filtering go on while what came before is written;
// rest ends that and may be called twice.
func (r *rendering) filtered(src audio.Source) (out audio.Source, rest func(), err error) {
	setup := r.filter.Setup()
	setup.Kernel, setup.Workers = r.plan.Options.Kernel, r.plan.coresEach()
	if setup.Workers < 2 || r.rec.Frames() < overlapFrom {
		out, err = r.filter.ApplyWith(src, setup)
		return out, func() {}, err
	}
	read := audio.NewAhead(src, block, 2)
	filtered, err := r.filter.ApplyWith(read, setup)
	if err != nil {
		read.Close()
		return nil, nil, err
	}
	written := audio.NewAhead(filtered, block, 2)
	return written, func() { written.Close(); read.Close() }, nil
}

// overlapFrom is the least length in frames for which goroutines of their own pay.
const overlapFrom = 8 * block

func (r *rendering) create() (*audio.Writer, error) {
	if err := os.MkdirAll(filepath.Dir(r.job.Output), 0o777); err != nil {
		return nil, fmt.Errorf("%s: its folder cannot be made: %w; choose another for --out", r.job.Output, cause(err))
	}
	return audio.Create(r.job.Output, r.spec())
}

func (r *rendering) commit(w *audio.Writer) error {
	r.leave()
	if err := w.Commit(); err != nil {
		return err
	}
	info, err := os.Stat(r.job.Output)
	if err != nil {
		return err
	}
	r.entry.SHA256Out, r.entry.OutputBytes = w.SHA256(), info.Size()
	return nil
}

// copy moves the frames, scaled, from the filter to the writer.
func (r *rendering) copy(ctx context.Context, w *audio.Writer, out audio.Source, after *audio.Meter) error {
	buf := make([]float64, block*out.Format().NumChannels)
	for {
		if err := ctx.Err(); err != nil {
			return err
		}
		n, err := out.ReadFrames(buf)
		if err == io.EOF {
			return nil
		}
		if err != nil {
			return err
		}
		frames := buf[:n*out.Format().NumChannels]
		if r.gain != 1 {
			for i := range frames {
				frames[i] *= r.gain
			}
		}
		after.Add(frames)
		if err := w.WriteFrames(frames); err != nil {
			return err
		}
	}
}

// spec describes the output file. An unchanged sample format keeps the
// original's own description, and with it valid bits and speaker positions.
func (r *rendering) spec() audio.Spec {
	format, encoding := r.rec.Format(), r.plan.encoding(r.rec)
	s := audio.Spec{Rate: format.SampleRate, Channels: format.NumChannels, Encoding: encoding, Frames: r.rec.Frames(), Mode: 0o666}
	if encoding == r.rec.Encoding() {
		s.FmtChunk = r.rec.Layout().Fmt
	}
	s.Dither = r.dither(encoding)
	return s
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
			out[c] = pcm.NewDither(r.plan.Chain.SHA256, filepath.ToSlash(r.job.Rel), c)
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

// metered measures what is read through it and tells how far it is.
type metered struct {
	audio.Source
	meter      *audio.Meter
	progress   Progress
	frameBytes int64
}

func (m *metered) ReadFrames(dst []float64) (int, error) {
	n, err := m.Source.ReadFrames(dst)
	if err == nil {
		m.meter.Add(dst[:n*m.Format().NumChannels])
		if m.progress != nil {
			m.progress.Bytes(int64(n) * m.frameBytes)
		}
	}
	return n, err
}
