package pair

import (
	"fmt"
	"math"

	"fettle/audit/estimate"
)

// Verdict says how two recordings are related.
type Verdict string

// The verdicts. Only Filtered comes with figures.
const (
	Filtered  Verdict = "filtered"  // by a linear filter, noise and all
	Unrelated Verdict = "unrelated" // by none that can be seen
	Drifting  Verdict = "drifting"  // a copy by another clock
	Resampled Verdict = "resampled" // a copy at another speed
	Silent    Verdict = "silent"    // nothing to measure
)

// Report is what two recordings show.
type Report struct {
	Rate    int // Hz
	Verdict Verdict
	// Reason says in a sentence why the verdict is not Filtered, or is "".
	Reason string
	// Lag is how many whole frames later the processed recording is.
	Lag int64
	// Drift is how many millionths more samples the processed recording has for the same
	// time, Err the half width of its interval; NaN: not stated.
	Drift, DriftErr float64
	// Speed is what a Resampled copy plays at, 1 for the original's.
	Speed    float64
	Warnings []string
	Channels []*Result
}

// comparison is a measurement under way.
type comparison struct {
	openOriginal, openProcessed Opener
	original, processed         *envelope
	rate                        int
	channels                    int
	lag                         int64
	report                      *Report
}

// Measure compares two recordings of the same rate and channels. Errors are of
// reading, or say that the formats differ; what the recordings do not show is
// in the Report.
func Measure(original, processed Opener) (*Report, error) {
	c := &comparison{openOriginal: original, openProcessed: processed}
	var err error
	if c.original, err = envelopeOf(original); err != nil {
		return nil, err
	}
	if c.processed, err = envelopeOf(processed); err != nil {
		return nil, err
	}
	c.rate, c.channels = c.original.rate, len(c.original.loud)
	c.report = &Report{Rate: c.rate, Verdict: Filtered, Drift: math.NaN(), DriftErr: math.NaN(), Speed: 1}
	if n := len(c.processed.loud); n != c.channels {
		return nil, fmt.Errorf("the original has %d channels, the processed recording %d; compare recordings with the same channels", c.channels, n)
	}
	if rate := c.processed.rate; rate != c.rate {
		c.refuse(Resampled, "the original is at %d Hz, the processed recording at %d Hz: a copy at another rate is no filtering of the original; convert neither, or render at the original's rate", c.rate, rate)
		return c.report, nil
	}
	for _, step := range []func() error{c.coarse, c.fine, c.measure} {
		if err := step(); err != nil || c.report.Verdict != Filtered {
			return c.report, err
		}
	}
	return c.report, nil
}

func (c *comparison) refuse(v Verdict, format string, args ...any) {
	c.report.Verdict, c.report.Reason = v, fmt.Sprintf(format, args...)
}

// overlap is the stretch of the original that the processed recording holds at the
// lag.
func (c *comparison) overlap() (from, to int64) {
	return max(0, -c.lag), min(c.original.frames, c.processed.frames-c.lag)
}

// coarse finds the lag to a step, and another speed.
func (c *comparison) coarse() error {
	switch {
	case c.original.silent():
		c.refuse(Silent, "the original is silent")
		return nil
	case c.processed.silent():
		c.refuse(Silent, "the processed recording is silent")
		return nil
	}
	together(c.original, c.processed)
	f := find(c.original, c.processed)
	if f.speed != 1 {
		c.plays(f.speed)
		return nil
	}
	if f.clear >= clearly {
		c.lag = f.frames
	}
	return nil
}

// most of the stretches must agree.
const most = 0.6

// fine finds the lag to a sample, and drift.
func (c *comparison) fine() error {
	list, err := c.stretches()
	if err != nil {
		return err
	}
	var offsets []offset
	tones := 0
	for _, s := range list {
		o, ok, tone := s.lagOf()
		if tone {
			tones++
		} else if ok {
			offsets = append(offsets, o)
		}
	}
	on := agreed(offsets)
	switch {
	case len(list) == 0:
		c.refuse(Silent, "silence leaves nothing to measure where the two recordings overlap")
	case 2*tones > len(list):
		c.refuse(Unrelated, "the recordings repeat themselves, as a tone does, so several delays fit alike; compare a passage with speech, music or noise")
	case float64(len(on)) < most*float64(len(list)):
		c.refuse(Unrelated, "the two are not related by a linear filter: in %d of %d stretches nothing in the processed recording answers the original at a common delay", len(list)-len(on), len(list))
	default:
		c.place(on)
	}
	return nil
}

// place sets the lag from stretches that agree, or finds drift in them.
func (c *comparison) place(on []offset) {
	var at, lag []float64
	for _, o := range on {
		at, lag = append(at, o.at), append(lag, o.lag)
	}
	if len(on) >= 3 && at[len(at)-1] > at[0] {
		line := estimate.FitLine(at, lag)
		moved := math.Abs(line.Slope) * (at[len(at)-1] - at[0])
		if moved > 1 && math.Abs(line.Slope) > 2*line.SlopeHalf {
			if math.Abs(line.Slope) > mostDrift {
				c.plays(1 / (1 + line.Slope))
			} else {
				c.drifts(line.Slope, line.SlopeHalf, moved)
			}
			return
		}
	}
	var sum float64
	for _, v := range lag {
		sum += v
	}
	c.lag += int64(math.Round(sum / float64(len(lag))))
	c.report.Lag = c.lag
}

// mostDrift is the greatest difference of two clocks; more is a change of speed.
const mostDrift = 500e-6

func (c *comparison) plays(speed float64) {
	c.report.Speed = speed
	c.refuse(Resampled, "the processed recording is a copy that plays %.5g times as fast; compare one made at the original's rate and speed", speed)
}

func (c *comparison) drifts(slope, half, moved float64) {
	c.report.Drift, c.report.DriftErr = 1e6*slope, 1e6*half
	c.refuse(Drifting, "the processed recording drifts: its clock is %.3g ppm off the original's, %.3g samples over the recording; compare one made on the original's clock", 1e6*slope, moved)
}
