package audit

import (
	"fettle/audio"
	"fettle/audit/figures"
	"fettle/audit/limits"
	"fettle/filter"
	"fettle/filter/stream/machine"
)

// Result is the audit of one path of a chain at one rate.
type Result struct {
	Chain   string
	Phase   filter.Realisation
	Rate    int    // Hz
	Channel int    // from 1; 0: every channel that no stage names
	Stage   string // of one stage by itself, its text; "": the whole chain
	// Shared tells that the path serves all channels alike.
	Shared bool

	Latency filter.Latency
	// Delay in samples is what the chain's delay stages add on purpose.
	Delay int
	// Taps, Sections and ZeroSections (run forward and backward) are what the
	// path is made of.
	Taps, Sections, ZeroSections int
	// Operations is about how many multiplications a sample costs.
	Operations float64
	// Character says what kind of filter the path is; "" for a kernel too long
	// to be told.
	Character string
	// Notes and Warnings are the path's.
	Notes, Warnings []string
	// TargetErrorDB and ToleranceDB: how far the magnitude strays from the
	// chain's target, and how far it may.
	TargetErrorDB, ToleranceDB float64

	Figures *figures.Figures
	// Response is the impulse response that Figures were taken of, Origin the
	// index of its aligned instant.
	Response []float64
	Origin   int
	// Target is at the frequencies of Figures.Curve.
	Target Target
	// Verdicts are on the limits that Judge was given.
	Verdicts []limits.Verdict
	// Disagreement in seconds between the arrivals by impulse and by chirp,
	// and AnalyticDisagreement between impulse and the coefficients' own
	// formulas, in the worst carried band; NaN when no band is carried.
	Disagreement, AnalyticDisagreement float64
	// ThroughFile is what Ship adds, one entry a kind of probe.
	ThroughFile []ThroughFile
}

// Chain audits every path of a realised chain under one kernel.
func Chain(f *filter.Filter, kernel machine.Kernel) ([]*Result, error) {
	var out []*Result
	for _, p := range f.Paths() {
		r, err := auditPath(f, p, kernel)
		if err != nil {
			return nil, err
		}
		out = append(out, r)
	}
	return out, nil
}

func auditPath(f *filter.Filter, p *filter.Path, kernel machine.Kernel) (*Result, error) {
	r := &Result{
		Chain: f.Chain().Name, Phase: f.Phase(), Rate: f.Rate(),
		Channel: p.Channel, Shared: len(f.Paths()) == 1,
		Latency: f.Latency(p), Delay: p.Delay,
		Taps: len(p.System.Taps), Sections: len(p.System.Sections), ZeroSections: len(p.System.Zero),
		Operations: p.Operations(), Notes: p.Notes, Warnings: p.Warnings,
		TargetErrorDB: p.TargetErrorDB(), ToleranceDB: f.Chain().Tolerance,
	}
	if c, ok := p.Character(); ok {
		r.Character = c.String()
	}
	rate := float64(f.Rate())
	b := newBench(f, p, kernel)
	h, err := b.through(impulse(f.Rate(), b.channels, b.before, b.before+1+b.after))
	if err != nil {
		return nil, err
	}
	r.Figures = figures.Measure(figures.Response{
		H: h, Origin: b.before, Rate: rate,
		Carried: carried(p, rate), Removed: r.Latency.Removed,
	})
	r.Response, r.Origin = h, b.before
	r.Target = targetOf(f, p, r.Figures.Curve)
	return r, b.compareRoads(r, h)
}

// bench is where one path is measured.
type bench struct {
	filter   *filter.Filter
	path     *filter.Path
	kernel   machine.Kernel
	channels int // of the probe
	channel  int // to be read, from 0
	before   int // frames that the response needs before the aligned instant
	after    int // and after it
}

func newBench(f *filter.Filter, p *filter.Path, kernel machine.Kernel) *bench {
	b := &bench{filter: f, path: p, kernel: kernel}
	for _, q := range f.Paths() {
		b.channels = max(b.channels, q.Channel)
	}
	if p.Channel == 0 { // one more than any that a stage names
		b.channels++
		b.channel = b.channels - 1
	} else {
		b.channel = p.Channel - 1
	}
	b.before, b.after = f.Reach(p)
	return b
}

// through sends a probe through the filter, in silence.
func (b *bench) through(probe audio.Source) ([]float64, error) {
	out, err := b.filter.ApplyWith(probe, filter.Setup{Edges: filter.Silence, Kernel: b.kernel})
	if err != nil {
		return nil, err
	}
	return channelOf(out, b.channel)
}

// compareRoads measures by chirp and by formula what h says by impulse.
func (b *bench) compareRoads(r *Result, h []float64) error {
	rate := float64(r.Rate)
	// At least as much chirp as response, so that it stays a chirp.
	size := gridFor(2*(b.before+b.after+1), rate)
	x := make([]float64, size)
	copy(x[b.before:], chirp(r.Rate, size-b.before-b.after))
	y, err := b.through(everywhere(r.Rate, b.channels, x))
	if err != nil {
		return err
	}
	bands := r.Figures.Bands
	byImpulse := impulseRoad(h, b.before, size).arrivals(bands, rate, size)
	byChirp := chirpRoad(x, y, size).arrivals(bands, rate, size)
	shift := b.filter.Shift(b.path) - b.path.Delay
	byFormula := analyticRoad(b.path.System, shift, size).arrivals(bands, rate, size)
	r.Disagreement = disagreement(byImpulse, byChirp, bands)
	r.AnalyticDisagreement = disagreement(byImpulse, byFormula, bands)
	return nil
}

// carried tells which bands the chain carries: by its magnitude without what
// only shapes tone. Nil, by the response measured, where nothing does.
func carried(p *filter.Path, rate float64) []bool {
	if !p.ShapesTone() {
		return nil
	}
	size := gridFor(len(p.System.Taps), rate)
	return figures.CarriedBands(p.Carrier(size), rate/float64(size), rate)
}
