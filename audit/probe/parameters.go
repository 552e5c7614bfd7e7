package probe

import (
	"fmt"
	"math"
)

// Kind is what a probe repeats.
type Kind string

// The kinds of probe.
const (
	Chirp   Kind = "chirp"
	Impulse Kind = "impulse"
)

// Parameters fix a probe to the sample. Request.Plan makes them, Decode reads them
// back from a file.
type Parameters struct {
	Kind     Kind    `json:"kind"`
	Rate     int     `json:"rate_hz"`
	Channels int     `json:"channels"`
	From     float64 `json:"from_hz"` // of the band at full level; 0 for an impulse
	To       float64 `json:"to_hz"`   // half the rate for an impulse
	Level    float64 `json:"level_dbfs"`
	// Dither is the word length in bits whose dither the probe carries (triangular, two
	// steps of that word peak to peak), 0 for none.
	Dither  int `json:"dither_bits"`
	Lead    int `json:"lead_frames"`   // silence before the first repeat
	Signal  int `json:"signal_frames"` // length of one chirp; 1 for an impulse
	Period  int `json:"period_frames"` // from the start of one repeat to the next
	Repeats int `json:"repeats"`
}

const (
	// fadeIn is how far below From, as a ratio, the chirp begins: half an octave.
	fadeIn = math.Sqrt2
	// highest is the highest To as a share of the rate: what is left up to half the
	// rate is the taper.
	highest = 0.46
	fadeOut = 0.5 / highest
)

// Limits of what a file may claim: more is a damaged chunk, not a probe.
const (
	mostFrames  = 1 << 24 // of one signal, one pause
	mostRepeats = 1000
)

// Check returns an error that names the first parameter out of its range.
func (p Parameters) Check() error {
	rate := float64(p.Rate)
	for _, c := range []struct {
		ok   bool
		what string
	}{
		{p.Kind == Chirp || p.Kind == Impulse, fmt.Sprintf("kind %q; chirp and impulse are known", p.Kind)},
		{p.Rate >= 1000 && p.Rate <= 10_000_000, fmt.Sprintf("rate %d Hz; 1 kHz to 10 MHz can be used", p.Rate)},
		{p.Channels >= 1 && p.Channels <= 1024, fmt.Sprintf("%d channels; 1 to 1024 can be used", p.Channels)},
		{p.Level >= -120 && p.Level <= 0, fmt.Sprintf("level %g dBFS; -120 to 0 can be used", p.Level)},
		{p.Dither >= 0 && p.Dither <= 32, fmt.Sprintf("dither for %d bits; 0 to 32 can be used", p.Dither)},
		{p.Repeats >= 1 && p.Repeats <= mostRepeats, fmt.Sprintf("%d repeats; 1 to %d can be used", p.Repeats, mostRepeats)},
		{p.Lead >= 0 && p.Lead <= mostFrames, fmt.Sprintf("%d frames of silence at the start; 0 to %d can be used", p.Lead, mostFrames)},
		{p.Signal >= 1 && p.Signal <= mostFrames, fmt.Sprintf("a signal of %d frames; 1 to %d can be used", p.Signal, mostFrames)},
		{p.Period > p.Signal && p.Period <= 2*mostFrames, fmt.Sprintf("a repeat every %d frames; more than the signal's %d and at most %d can be used", p.Period, p.Signal, 2*mostFrames)},
		{p.Kind != Impulse || p.Signal == 1, fmt.Sprintf("an impulse of %d frames; it has 1", p.Signal)},
		{p.Kind != Chirp || p.From > 0 && 4*p.From <= p.To && p.To <= highest*rate*(1+1e-9),
			fmt.Sprintf("a chirp from %g to %g Hz; it needs two octaves or more, up to %g Hz at this rate", p.From, p.To, highest*rate)},
	} {
		if !c.ok {
			return fmt.Errorf("probe: %s", c.what)
		}
	}
	return nil
}

// Frames is the length of the whole probe.
func (p Parameters) Frames() int64 {
	return int64(p.Lead) + int64(p.Repeats)*int64(p.Period)
}

// String tells a probe in one line.
func (p Parameters) String() string {
	what := "an impulse"
	if p.Kind == Chirp {
		what = fmt.Sprintf("a chirp of %.4g s from %g to %g Hz", float64(p.Signal)/float64(p.Rate), tenth(p.From), tenth(p.To))
	}
	dithered := ""
	if p.Dither > 0 {
		dithered = fmt.Sprintf(", with dither of %d bits", p.Dither)
	}
	times := "once"
	if p.Repeats > 1 {
		times = fmt.Sprintf("%d times, %.4g s apart", p.Repeats, float64(p.Period)/float64(p.Rate))
	}
	return fmt.Sprintf("%s, peak %g dBFS, %s, at %d Hz%s", what, p.Level, times, p.Rate, dithered)
}

func tenth(x float64) float64 { return math.Round(10*x) / 10 }

// Amplitude is the peak of a signal, full scale 1.0.
func (p Parameters) Amplitude() float64 { return math.Pow(10, p.Level/20) }

// start and end are where the chirp's tapers begin and end, Hz.
func (p Parameters) start() float64 { return p.From / fadeIn }
func (p Parameters) end() float64   { return min(p.To*fadeOut, float64(p.Rate)/2) }

// growth is L: how many samples the chirp's frequency takes to grow by a factor
// of e.
func (p Parameters) growth() float64 {
	return float64(p.Signal) / math.Log(p.end()/p.start())
}

// OrderLead is how many samples before the linear response the product of a
// distortion of the given order arrives: L·ln(order) (Farina 2000). It serves for
// orders between whole ones too. 0 for an impulse, which cannot tell them apart.
func (p Parameters) OrderLead(order float64) float64 {
	if p.Kind != Chirp {
		return 0
	}
	return p.growth() * math.Log(order)
}

// Request is a probe as a user asks for it. Defaults gives one to start from.
type Request struct {
	Kind     Kind
	Rate     int // Hz
	Channels int
	Seconds  float64 // of one chirp; from impulse to impulse
	Pause    float64 // seconds after a chirp, for what rings on
	From, To float64 // Hz, of a chirp
	Level    float64 // dBFS
	Repeats  int
	Dither   int // bits, 0 for none
}

// Defaults asks for a probe of -20 dBFS in one channel without dither: three chirps
// of 10 s, 2 s apart, from 10 Hz, well below the lowest band's edge of 17.8 Hz, to 0.46 of
// the rate; or thirty impulses a second apart.
func Defaults(kind Kind, rate int) Request {
	r := Request{Kind: kind, Rate: rate, Channels: 1, Level: -20}
	if kind == Impulse {
		r.Seconds, r.Repeats = 1, 30
		return r
	}
	r.Seconds, r.Pause, r.Repeats = 10, 2, 3
	r.From, r.To = 10, highest*float64(rate)
	return r
}

const (
	leadSeconds     = 0.5
	shortestSeconds = 0.05
	longestSeconds  = 300.0
	shortestPause   = 0.1
	longestPause    = 60.0
)

// Plan fixes the parameters of a probe. The error says what cannot be used.
func (r Request) Plan() (Parameters, error) {
	if !(r.Seconds >= shortestSeconds && r.Seconds <= longestSeconds) {
		return Parameters{}, fmt.Errorf("probe: %g seconds; %g to %g can be used", r.Seconds, shortestSeconds, longestSeconds)
	}
	if r.Kind == Chirp && !(r.Pause >= shortestPause && r.Pause <= longestPause) {
		return Parameters{}, fmt.Errorf("probe: a pause of %g seconds; %g to %g can be used", r.Pause, shortestPause, longestPause)
	}
	rate := float64(r.Rate)
	p := Parameters{
		Kind: r.Kind, Rate: r.Rate, Channels: r.Channels, From: r.From, To: r.To,
		Level: r.Level, Dither: r.Dither, Lead: int(leadSeconds * rate), Repeats: r.Repeats,
	}
	seconds := r.Seconds
	if r.Kind == Chirp {
		p.Signal = int(math.Round(r.Seconds * rate))
		seconds += r.Pause
	} else {
		p.Signal, p.From, p.To = 1, 0, rate/2
	}
	p.Period = int(math.Round(offMains(seconds) * rate))
	return p, p.Check()
}

// offMains lengthens a period to tenths of a second and 1/150: from repeat to
// repeat the phase of 50 Hz moves by a third of a turn, that of 60 Hz by 0.4, and
// so do their harmonics but every third, or every fifth.
func offMains(seconds float64) float64 {
	return math.Ceil(seconds*10-1e-9)/10 + 1.0/150
}
