package audit

import (
	"context"
	"fmt"
	"math"
	"os"
	"path/filepath"

	"fettle/audio"
	"fettle/audio/pcm"
	"fettle/audit/capture"
	"fettle/audit/probe"
	"fettle/filter"
	"fettle/filter/stream/machine"
)

// ThroughFile is a path measured as it ships: a probe in a file, read, filtered,
// quantised with dither, written to a file and read back.
type ThroughFile struct {
	Encoding pcm.Encoding
	Probe    probe.Parameters
	Captured *capture.Result
	// Apart is by how much its bands' arrivals, latency included, differ from those
	// computed without a file.
	Apart Apart
}

// Apart is how far two measurements of one path differ over its carried bands.
type Apart struct {
	Seconds float64 // in the band where they differ most
	Hz      float64 // that band's nominal frequency
	// Within of Bands bands are within the 95 % interval of what was measured, to 20 ns.
	Within, Bands int
}

// Probes through files: as loud as a chain's gain allows, since nobody hears them.
const (
	shippedLevel   = -6.0 // dBFS at the chain's highest gain
	shippedSeconds = 8.0
	shippedFrom    = 2.0 // Hz, further below the lowest band than a loudspeaker would take
	chirpRepeats   = 3
	impulseRepeats = 12
	// deconvolved is how exact a response is that was divided out of a chirp, s: it is
	// the same in every repeat, so that no scatter shows it. Without noise 10 ns were
	// measured.
	deconvolved = 20e-9
	// shippedPause is the least silence after a signal, s.
	shippedPause = 0.5
)

// Ship measures a filter's paths through files of an encoding, by chirp and by
// dithered impulse, and adds what it finds to results, which are those that Chain gave.
// It fails when the filter rings too long for a probe, or when files cannot be written to
// the system's folder for temporary ones.
func Ship(ctx context.Context, f *filter.Filter, results []*Result, kernel machine.Kernel, to pcm.Encoding) error {
	dir, err := os.MkdirTemp("", "fettle-audit-")
	if err != nil {
		return fmt.Errorf("through a file: %w", err)
	}
	defer os.RemoveAll(dir)
	for _, kind := range []probe.Kind{probe.Chirp, probe.Impulse} {
		if err := ship(ctx, f, results, kernel, to, kind, dir); err != nil {
			return fmt.Errorf("through a file, by %s: %w", kind, err)
		}
	}
	return nil
}

func ship(ctx context.Context, f *filter.Filter, results []*Result, kernel machine.Kernel, to pcm.Encoding, kind probe.Kind, dir string) error {
	p, err := shippedProbe(f, results, to, kind)
	if err != nil {
		return err
	}
	in, treated := filepath.Join(dir, string(kind)+".wav"), filepath.Join(dir, string(kind)+"-treated.wav")
	if err := p.Write(ctx, in, to); err != nil {
		return err
	}
	if err := treat(ctx, f, kernel, to, in, treated); err != nil {
		return err
	}
	back, err := audio.Open(treated)
	if err != nil {
		return err
	}
	defer back.Close()
	report, err := capture.Measure(p, back)
	if err != nil {
		return err
	}
	for _, r := range results {
		c := report.Channels[channelOfResult(f, r)]
		r.ThroughFile = append(r.ThroughFile, ThroughFile{to, p, c, apart(r, c)})
	}
	return nil
}

// shippedProbe is one that leaves the filter time to ring and room below full scale.
func shippedProbe(f *filter.Filter, results []*Result, to pcm.Encoding, kind probe.Kind) (probe.Parameters, error) {
	rate := float64(f.Rate())
	before, after, gain := 0, 0, 0.0
	r := probe.Defaults(kind, f.Rate())
	r.Channels = channelsOf(f)
	for i, path := range f.Paths() {
		b, a := f.Reach(path)
		before, after = max(before, b), max(after, a)
		gain = max(gain, loudest(results[i], kind))
	}
	pause := shippedPause + float64(before+after)/rate
	r.Level = shippedLevel - 20*math.Log10(max(gain, 1))
	if r.From, r.Seconds, r.Pause, r.Repeats = shippedFrom, shippedSeconds, pause, chirpRepeats; kind == probe.Impulse {
		r.Seconds, r.Repeats = pause, impulseRepeats
		if !to.Float {
			r.Dither = to.Bits
		}
	}
	p, err := r.Plan()
	if err != nil {
		return p, fmt.Errorf("the chain rings for %.3g s: %w", pause, err)
	}
	p.Lead = max(p.Lead, before)
	return p, p.Check()
}

// loudest is the greatest gain that a probe meets, as a factor.
func loudest(r *Result, kind probe.Kind) (gain float64) {
	if kind == probe.Impulse {
		for _, v := range r.Response {
			gain = max(gain, math.Abs(v))
		}
		return gain
	}
	for _, db := range r.Figures.Curve.Magnitude {
		gain = max(gain, math.Pow(10, db/20))
	}
	return gain
}

// treat filters a file into another, as a batch does.
func treat(ctx context.Context, f *filter.Filter, kernel machine.Kernel, to pcm.Encoding, from, into string) error {
	src, err := audio.Open(from)
	if err != nil {
		return err
	}
	defer src.Close()
	setup := f.Setup()
	setup.Kernel = kernel
	filtered, err := f.ApplyWith(src, setup)
	if err != nil {
		return err
	}
	spec := audio.Spec{Rate: f.Rate(), Channels: src.Format().NumChannels, Encoding: to, Frames: src.Frames()}
	if !to.Float {
		spec.Dither = probe.Dithers(spec.Channels, filepath.Base(into))
	}
	w, err := audio.Create(into, spec)
	if err != nil {
		return err
	}
	defer w.Abort()
	if err := probe.Copy(ctx, w, filtered); err != nil {
		return err
	}
	return w.Commit()
}

// channelsOf is how many channels a probe of all paths has: one more than any that a
// stage names.
func channelsOf(f *filter.Filter) int {
	channels := 0
	for _, p := range f.Paths() {
		channels = max(channels, p.Channel)
	}
	return channels + 1
}

// channelOfResult is the channel, from 0, that shows a result's path.
func channelOfResult(f *filter.Filter, r *Result) int {
	if r.Channel > 0 {
		return r.Channel - 1
	}
	return channelsOf(f) - 1
}

// apart compares when bands arrive, each counted from the aligned instant.
func apart(r *Result, c *capture.Result) Apart {
	out := Apart{Seconds: math.NaN(), Hz: math.NaN()}
	if c.Absent != "" {
		return out
	}
	rate := float64(r.Rate)
	for i, b := range r.Figures.Bands {
		m, e := c.Figures.Bands[i], c.Errors.Bands[i]
		if !b.Carried || math.IsNaN(m.Arrival) {
			continue
		}
		out.Bands++
		off := math.Abs(m.Arrival + c.Latency/rate - b.Arrival - r.Figures.Latency/rate)
		if off <= e.Arrival+c.LatencyErr/rate+deconvolved {
			out.Within++
		}
		if !(off <= out.Seconds) {
			out.Seconds, out.Hz = off, b.Nominal
		}
	}
	return out
}
