package capture

import (
	"errors"
	"fmt"
	"math"

	"fettle/audio"
	"fettle/audit/figures"
	"fettle/audit/limits"
	"fettle/audit/probe"
)

// Report is what a capture shows.
type Report struct {
	Probe probe.Parameters
	// Repeats is how many of the probe's repeats the capture holds.
	Repeats int
	Drift   Drift
	// Warnings are what makes the figures doubtful, in sentences without a full stop.
	Warnings []string
	Channels []*Result
}

// Drift is how much faster the recording clock ran than the playing one: 1 means
// that it counts a millionth more samples.
type Drift struct {
	PPM, Err  float64 // Err: half width of the 95 % interval; NaN: not stated
	NotStated string  // why, or ""
}

// Result is one channel of the capture.
type Result struct {
	Channel int // from 1
	Rate    int // Hz
	// Absent says why there is nothing else, or is "".
	Absent string
	// Latency is how many samples after the probe's own first repeat the first
	// repeat arrives; what was cut off the capture's start counts.
	Latency, LatencyErr float64
	// Removed is the nearest whole number to Latency: Figures are relative to it.
	Removed int
	// Behind is how much later this channel is than the first that holds the
	// probe, in samples.
	Behind, BehindErr float64

	// Figures are those of package figures, noise subtracted; Errors has, at the
	// same places, the half widths of their 95 % intervals, NaN where there is none.
	// The sum test is taken at equal level. NotStated has keys as the audit's JSON has.
	Figures, Errors *figures.Figures
	// Response is the impulse response, cut, that Figures were taken of; Origin is the
	// index of its aligned instant, Removed after the probe's first repeat.
	Response []float64
	Origin   int
	Noise    []Noise
	Products []Product
	Warnings []string
	// Verdicts are on the limits that Judge was given.
	Verdicts []limits.Verdict

	latencies []float64 // without each group
}

// Noise is one band's noise.
type Noise struct {
	figures.Band
	// Level is the noise in the band as captured, RMS, dB re full scale 1.0.
	Level float64
	// SNR is that of the response measured, after averaging and cutting, dB.
	SNR float64
}

// Product is what distortion of one order makes of the probe.
type Product struct {
	Order int
	Lead  float64 // s before the linear response
	// Level is the product's energy over the linear response's in the band where the
	// probe makes it (from Order times the probe's lowest frequency), dB. For a
	// device that is flat it is the harmonic's amplitude over the fundamental's.
	Level, Err float64
	NotStated  string
}

// ErrNotFound says that the capture does not hold the probe.
var ErrNotFound = errors.New("the probe is not in the capture")

// ErrSwapped says that the two files are each other's.
var ErrSwapped = errors.New("probe and capture are swapped: the one named as capture is the probe itself")

// mostSamples is the most of a capture that is held at once: half a GiB.
const mostSamples = 1 << 26

// Measure reads a capture of the probe p. Errors: the rates differ, the capture is
// too long, cannot be read or does not hold the probe (ErrNotFound), or the clocks
// differ by more than a clock can.
func Measure(p probe.Parameters, captured audio.Source) (*Report, error) {
	if err := p.Check(); err != nil {
		return nil, err
	}
	if rate := captured.Format().SampleRate; rate != p.Rate {
		return nil, fmt.Errorf("the capture is at %d Hz, the probe at %d Hz; capture at the probe's rate, or make a probe at the capture's", rate, p.Rate)
	}
	planes, err := read(captured)
	if err != nil {
		return nil, err
	}
	return measure(p, planes)
}

// Check reads both files and says whether the probe is what its parameters say: nil,
// ErrSwapped when it is not and the capture is, *probe.AlteredError when neither is,
// or an error of reading.
func Check(p probe.Parameters, probeFile, captured audio.Source) error {
	err := p.Verify(probeFile)
	var altered *probe.AlteredError
	if !errors.As(err, &altered) {
		return err
	}
	if p.Verify(captured) == nil {
		return ErrSwapped
	}
	return altered
}

func measure(p probe.Parameters, planes [][]float64) (*Report, error) {
	r := &Report{Probe: p}
	at, err := findIn(planes, p)
	if err != nil {
		return nil, err
	}
	r.Repeats = len(at.starts)
	if r.Repeats < p.Repeats {
		r.Warnings = append(r.Warnings, fmt.Sprintf("only %d of the probe's %d repeats are whole in the capture, and the first of those counts as the first; record all of them", r.Repeats, p.Repeats))
	}
	stretch, err := r.setDrift(at)
	if err != nil {
		return nil, err
	}
	d := newDeconvolver(p, stretch, at.starts[0], r.Repeats)
	for c, y := range planes {
		r.Channels = append(r.Channels, d.channel(c+1, y, r.Drift.Err))
	}
	comparePlaces(r.Channels)
	return r, nil
}

// mostPPM is the greatest difference of clocks, in ppm, that is corrected. Crystals
// are within 100 (common practice, no source); more is a change of speed.
const mostPPM = 500

// setDrift fits a line to the repeats' delays and returns how many samples the
// recording clock takes to one of the playing clock.
func (r *Report) setDrift(at *sighting) (stretch float64, err error) {
	r.Drift = Drift{math.NaN(), math.NaN(), ""}
	if r.Repeats == 1 {
		r.Drift.NotStated = "one repeat cannot tell drift from dispersion; use three or more"
		return 1, nil
	}
	line := at.clock(r.Probe.Period)
	r.Drift.PPM, r.Drift.Err = 1e6*line.Slope, 1e6*line.SlopeHalf
	if r.Repeats == 2 {
		r.Drift.NotStated = "two repeats give no interval; use three or more"
	}
	if !(math.Abs(r.Drift.PPM) <= mostPPM) {
		return 0, fmt.Errorf("the capture's clock is %.0f ppm off the probe's, more than the %d that is corrected; "+
			"this is a change of speed or a conversion of the rate, not a clock: capture without it", r.Drift.PPM, mostPPM)
	}
	if line.Scatter > wander {
		r.Warnings = append(r.Warnings, fmt.Sprintf("the clock is unsteady: repeats are off an even drift by %.2f samples (RMS)", line.Scatter))
	}
	return 1 + line.Slope, nil
}

// wander is how many samples repeats may be off an even drift without a warning: a
// tenth of a sample is 36 degrees of phase at half the rate.
const wander = 0.1

// comparePlaces fills in how much later each channel is than the first.
func comparePlaces(channels []*Result) {
	var first *Result
	for _, c := range channels {
		c.Behind, c.BehindErr = math.NaN(), math.NaN()
		if c.Absent != "" {
			continue
		}
		if first == nil {
			first = c
		}
		c.Behind = c.Latency - first.Latency
		c.BehindErr = c.differenceErr(first)
	}
}

// Judge holds every channel that has the probe against limits. Latency counts from the
// probe's first repeat.
func (r *Report) Judge(l []limits.Limit) {
	for _, c := range r.Channels {
		if c.Absent != "" {
			continue
		}
		s := limits.Of(c.Figures, float64(c.Rate))
		s.Errors = c.Errors
		s.Latency, s.LatencyError = c.Latency, c.LatencyErr
		c.Verdicts = limits.Judge(s, l)
	}
}
