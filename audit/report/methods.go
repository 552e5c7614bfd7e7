package report

import (
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"

	"fettle/audit"
	"fettle/audit/figures"
	"fettle/filter"
)

// Methods writes a paragraph for a treatment report or a paper: what the chain is,
// by its file and as measured, and what was done about its delay.
func Methods(w io.Writer, c *filter.Chain, r *audit.Result, version string) error {
	s := []string{
		fmt.Sprintf("Recordings were filtered with fettle %s through the chain \"%s\" (SHA-256 %x) at a sample rate of %d Hz.", version, c.Name, c.SHA256, r.Rate),
		fmt.Sprintf("It consists of %s.", stagesOf(c, r.Rate)),
		fmt.Sprintf("It was realised as %s (%s), %s.", r.Phase, builtOf(r), passesOf(r)),
	}
	s = append(s, measuredOf(r)...)
	s = append(s, delayOf(r)...)
	for _, line := range wrapped(strings.Join(s, " "), 80) {
		if _, err := fmt.Fprintln(w, line); err != nil {
			return err
		}
	}
	return nil
}

func stagesOf(c *filter.Chain, rate int) string {
	var texts []string
	for _, s := range c.Stages {
		if s.When.Holds(float64(rate)) {
			texts = append(texts, s.Text)
		}
	}
	if texts == nil {
		return "no stage"
	}
	return strings.Join(texts, "; ")
}

func passesOf(r *audit.Result) string {
	passes := "in one pass"
	if r.ZeroSections > 0 {
		passes = "in one pass forward and one backward"
	}
	if r.Character == "" {
		return passes
	}
	return r.Character + ", " + passes
}

// measuredOf gives corners and ripple as they are, not as they were asked for.
func measuredOf(r *audit.Result) []string {
	out := []string{fmt.Sprintf("Its magnitude strays from the target by at most %s dB (tolerance %g dB).", decimal(r.TargetErrorDB, 3), r.ToleranceDB)}
	if text := corners(r.Figures.Curve); text != "" {
		out = append(out, "Measured relative to the largest magnitude, "+text+".")
	}
	return out
}

// corners finds where the curve crosses -3, -6 and -60 dB for the first time from
// its highest point down in frequency and up.
func corners(c figures.Curve) string {
	top := 0
	for i, m := range c.Magnitude {
		if m > c.Magnitude[top] {
			top = i
		}
	}
	var parts []string
	for _, step := range []int{-1, 1} {
		for _, level := range []float64{-3, -6, -60} {
			if hz := crossing(c, top, step, c.Magnitude[top]+level); hz > 0 {
				parts = append(parts, fmt.Sprintf("%g dB lies at %s", level, hertz(rounded(hz))))
			}
		}
	}
	return strings.Join(parts, ", ")
}

// crossing interpolates over the logarithm of frequency; 0 for none.
func crossing(c figures.Curve, top, step int, level float64) float64 {
	for i := top; i+step >= 0 && i+step < len(c.Hz); i += step {
		a, b := c.Magnitude[i], c.Magnitude[i+step]
		if b <= level {
			share := (a - level) / (a - b)
			return c.Hz[i] * math.Pow(c.Hz[i+step]/c.Hz[i], share)
		}
	}
	return 0
}

// rounded keeps three figures.
func rounded(hz float64) float64 {
	v, _ := strconv.ParseFloat(strconv.FormatFloat(hz, 'g', 3, 64), 64) // what was printed can be read
	return v
}

func delayOf(r *audit.Result) []string {
	f, l := r.Figures, r.Latency
	out := []string{fmt.Sprintf("Its bulk latency of %s samples was compensated by %s whole samples, which leaves %s samples; the recordings keep their length.",
		decimal(l.Removed+l.Residual, 2), decimal(l.Removed, 0), decimal(l.Residual, 2))}
	if l.LookAhead > 0 {
		out = append(out, fmt.Sprintf("The aligned treatment is not causal: it looks %d samples ahead.", l.LookAhead))
	}
	if r.Delay > 0 {
		out = append(out, fmt.Sprintf("A delay of %d samples is intended and was kept.", r.Delay))
	}
	out = append(out, fmt.Sprintf("One-third-octave bands (IEC 61260-1) within 20 dB of the strongest arrive within %s of each other; the RMS duration of the pink-weighted impulse response is %s, of which phase adds %s; energy ahead of the main lobe is %s (white).",
		milliseconds(f.DelaySpread), milliseconds(f.Pink.Total), milliseconds(f.Pink.Phase), ringLevel(f.PreRing.White.Level)))
	return out
}
