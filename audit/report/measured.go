package report

import (
	"fmt"
	"io"
	"math"
	"strings"

	"fettle/audit/capture"
	"fettle/audit/figures"
	"fettle/audit/pair"
)

var nan = math.NaN()

// Capture writes a capture's audit for a terminal: what the whole capture shows, and
// the figures of every channel with the half widths of their 95 % intervals. No line is
// longer than Width, but for the names of the files.
func Capture(w io.Writer, n Names, r *capture.Report) error {
	var b strings.Builder
	titled(&b, n.To+", a capture of "+n.From)
	field := func(name, text string) { b.WriteString(fieldLines(name, text)) }
	field("probe", r.Probe.String())
	field("repeats found", fmt.Sprintf("%d of %d", r.Repeats, r.Probe.Repeats))
	field("clock drift", driftOf(r))
	warnings(&b, r.Warnings)
	for _, c := range r.Channels {
		b.WriteByte('\n')
		captured(&b, c, len(r.Channels))
	}
	_, err := io.WriteString(w, b.String())
	return err
}

func driftOf(r *capture.Report) string {
	if math.IsNaN(r.Drift.PPM) {
		return "not stated: " + r.Drift.NotStated
	}
	s := plusMinus(r.Drift.PPM, r.Drift.Err, 3) + " ppm: the recording clock runs " + map[bool]string{true: "slow", false: "fast"}[r.Drift.PPM < 0]
	if math.Abs(r.Drift.PPM) <= r.Drift.Err {
		s = plusMinus(r.Drift.PPM, r.Drift.Err, 3) + " ppm: none that can be told"
	}
	if math.IsNaN(r.Drift.Err) {
		s = plusMinus(r.Drift.PPM, r.Drift.Err, 3) + " ppm"
	}
	if r.Drift.NotStated != "" {
		s += "; " + r.Drift.NotStated
	}
	return s
}

func captured(b *strings.Builder, c *capture.Result, channels int) {
	titled(b, fmt.Sprintf("channel %d of %d, %s", c.Channel, channels, hertz(float64(c.Rate))))
	if c.Absent != "" {
		fmt.Fprintf(b, "  not stated: %s\n", c.Absent)
		warnings(b, c.Warnings)
		return
	}
	f, e := c.Figures, c.Errors
	sentences(b, CaptureWords(c))
	field := func(name, text string) { b.WriteString(fieldLines(name, text)) }
	field("latency", fmt.Sprintf("%s samples (%s) after the probe's first repeat", plusMinus(c.Latency, c.LatencyErr, 4), milliseconds(c.Latency/float64(c.Rate))))
	if c.Behind != 0 && !math.IsNaN(c.Behind) { // 0: it is the first itself
		field("after the first", plusMinus(c.Behind, c.BehindErr, 4)+" samples later than the first channel that has the probe")
	}
	field("polarity", polarityOf(f))
	field("delay spread", ofStated(f.DelaySpread, plusMinusMS(f.DelaySpread, e.DelaySpread)+" over the carried bands"))
	field("phase deviation", ofStated(f.PhaseDeviation, plusMinus(f.PhaseDeviation, e.PhaseDeviation, 2)+" degrees in the worst carried band"))
	field("smear, pink", measuredSmear(f.Pink, e.Pink))
	field("smear, white", measuredSmear(f.White, e.White))
	field("90 / 99.9 % of energy", "within "+plusMinusMS(f.D90, e.D90)+" / "+plusMinusMS(f.D999, e.D999))
	field("energy ahead", ofStated(f.Lead, plusMinusMS(f.Lead, e.Lead)+" before the aligned instant (-60 dB)"))
	field("sum test", ofStated(f.SumTest, plusMinus(f.SumTest, e.SumTest, 2)+" dB: deepest loss when mixed 1:1, at equal level, with the untreated"))
	field("distortion", productsOf(c.Products))
	warnings(b, c.Warnings)
	measuredRings(b, f, e)
	limitsTable(b, c.Verdicts)
	capturedBands(b, c)
}

// Pair writes the audit of a processed recording beside its original.
func Pair(w io.Writer, n Names, r *pair.Report) error {
	var b strings.Builder
	titled(&b, n.To+" beside "+n.From)
	field := func(name, text string) { b.WriteString(fieldLines(name, text)) }
	if r.Verdict != pair.Filtered {
		field("verdict", string(r.Verdict)+": "+r.Reason)
	} else {
		field("verdict", "filtered: the one is the other through a linear filter, as far as coherence shows")
	}
	if !math.IsNaN(r.Drift) {
		field("clock drift", plusMinus(r.Drift, r.DriftErr, 3)+" ppm")
	}
	warnings(&b, r.Warnings)
	if r.Verdict == pair.Filtered {
		for _, c := range r.Channels {
			b.WriteByte('\n')
			paired(&b, r, c)
		}
	}
	_, err := io.WriteString(w, b.String())
	return err
}

func paired(b *strings.Builder, r *pair.Report, c *pair.Result) {
	titled(b, fmt.Sprintf("channel %d of %d, %s", c.Channel, len(r.Channels), hertz(float64(r.Rate))))
	if c.Absent != "" {
		fmt.Fprintf(b, "  not stated: %s\n", c.Absent)
		return
	}
	f, _ := r.FiguresOf(c)
	sentences(b, PairWords(r, c))
	field := func(name, text string) { b.WriteString(fieldLines(name, text)) }
	field("delay", fmt.Sprintf("%s samples (%s) after the original", plusMinus(c.Delay, c.DelayErr, 4), milliseconds(c.Delay/float64(r.Rate))))
	field("polarity", polarityOf(f))
	field("gain", ofStated(c.Gain, plusMinus(c.Gain, c.GainErr, 3)+" dB over all"))
	field("coherence", decimal(c.Coherence, 3)+": the share of the output that is a linear function of the original")
	field("delay spread", ofStated(c.DelaySpread, plusMinusMS(c.DelaySpread, c.DelaySpreadErr)+" over the carried bands"))
	limitsTable(b, c.Verdicts)
	pairedBands(b, c)
}

// titled underlines a title.
func titled(b *strings.Builder, title string) {
	fmt.Fprintf(b, "%s\n%s\n", title, strings.Repeat("=", min(Width, len([]rune(title)))))
}

func sentences(b *strings.Builder, all []string) {
	for _, s := range all {
		for i, line := range wrapped(s, Width-4) {
			fmt.Fprintf(b, "%s%s\n", [...]string{"  ", "    "}[min(i, 1)], line)
		}
	}
}

// fieldLines is a figure with its name, folded.
func fieldLines(name, text string) string {
	var b strings.Builder
	for _, line := range wrapped(text, Width-25) {
		fmt.Fprintf(&b, "  %-22s %s\n", name, line)
		name = ""
	}
	return b.String()
}

func warnings(b *strings.Builder, all []string) {
	for _, s := range all {
		b.WriteString(fieldLines("beware", s))
	}
}

// plusMinus is a value with the half width of its interval, to as many digits as
// that allows and at most so many. The half width is rounded up. Where it is not
// known the value stands alone.
func plusMinus(value, half float64, digits int) string {
	switch {
	case math.IsNaN(value):
		return "not stated"
	case math.IsNaN(half):
		return decimal(value, digits)
	}
	if half > 0 {
		digits = max(0, min(digits, int(math.Ceil(-math.Log10(half)))+1))
	}
	unit := math.Pow(10, float64(digits))
	return decimal(value, digits) + " ±" + decimal(math.Ceil(half*unit*(1-1e-9))/unit, digits)
}

func plusMinusMS(value, half float64) string {
	s := plusMinus(value*toMS, half*toMS, 4)
	if math.IsNaN(value) {
		return s
	}
	return s + " ms"
}

// ofStated is a text about a value that is stated.
func ofStated(value float64, text string) string {
	if math.IsNaN(value) {
		return "not stated"
	}
	return text
}

// cellOf is plusMinus for a table.
func cellOf(value, half float64, digits int) string {
	if math.IsNaN(value) {
		return "-"
	}
	return plusMinus(value, half, digits)
}

func measuredSmear(s, e figures.Smear) string {
	return fmt.Sprintf("%s = magnitude %s and phase %s", plusMinusMS(s.Total, e.Total), plusMinusMS(s.Magnitude, e.Magnitude), plusMinusMS(s.Phase, e.Phase))
}

// productsOf lists what distortion made of the probe.
func productsOf(products []capture.Product) string {
	var parts []string
	for _, p := range products {
		text := "not stated"
		switch {
		case !math.IsNaN(p.Level):
			text = plusMinus(p.Level, p.Err, 1) + " dB"
		case p.NotStated != "":
			text += " (" + p.NotStated + ")"
		}
		parts = append(parts, fmt.Sprintf("order %d %s", p.Order, text))
	}
	if parts == nil {
		return "not stated: an impulse cannot tell it from the response"
	}
	return strings.Join(parts, "; ")
}

// measuredRings tables early and late energy.
func measuredRings(b *strings.Builder, f, e *figures.Figures) {
	fmt.Fprintf(b, "\n  %-17s %15s %17s   %s\n", "", "level, dB", "to -60 dB, ms", "energy beyond 2 / 5 / 20 ms, dB")
	line := func(name string, c, e figures.RingColumn) {
		fmt.Fprintf(b, "  %-17s %15s %17s   %s\n", name, levelCell(c.Level, e.Level), cellOf(c.Length*toMS, e.Length*toMS, 3),
			strings.Join([]string{levelCell(c.Beyond[0], e.Beyond[0]), levelCell(c.Beyond[1], e.Beyond[1]), levelCell(c.Beyond[2], e.Beyond[2])}, " / "))
	}
	line("pre-ring, white", f.PreRing.White, e.PreRing.White)
	line("pre-ring, pink", f.PreRing.Pink, e.PreRing.Pink)
	line("post-ring, white", f.PostRing.White, e.PostRing.White)
	line("post-ring, pink", f.PostRing.Pink, e.PostRing.Pink)
}

func levelCell(db, half float64) string {
	if db <= figures.None {
		return "none"
	}
	return cellOf(db, half, 1)
}

func capturedBands(b *strings.Builder, c *capture.Result) {
	const row = "  %7s %14s %17s %15s %14s %14s %6s\n"
	fmt.Fprintf(b, "\n"+row, "band", "gain", "arrival", "spread", "pre-ring", "post-ring", "S/N")
	fmt.Fprintf(b, row, "Hz", "dB", "ms", "ms", "ms", "ms", "dB")
	for i, x := range c.Figures.Bands {
		e := c.Errors.Bands[i]
		if !x.Carried {
			notCarried(b, x, e, c.Figures.NotStated)
			continue
		}
		fmt.Fprintf(b, row, fmt.Sprintf("%g", x.Nominal), cellOf(x.Gain, e.Gain, 2), cellOf(x.Arrival*toMS, e.Arrival*toMS, 4), cellOf(x.Spread*toMS, e.Spread*toMS, 4),
			cellOf(x.PreRing*toMS, e.PreRing*toMS, 2), cellOf(x.PostRing*toMS, e.PostRing*toMS, 2), decimal(c.Noise[i].SNR, 0))
	}
}

// notCarried is the row of a band that verdicts do not speak of, with the reason.
func notCarried(b *strings.Builder, x, e figures.BandFigures, reasons map[string]string) {
	why := reasons[fmt.Sprintf("bands[%g Hz]", x.Nominal)]
	if why != "" {
		why = ": " + why
	}
	fmt.Fprintf(b, "  %7g %14s     not carried%s\n", x.Nominal, cellOf(x.Gain, e.Gain, 2), why)
}

func pairedBands(b *strings.Builder, c *pair.Result) {
	const row = "  %8s %16s %20s %20s %11s\n"
	fmt.Fprintf(b, "\n"+row, "band", "gain", "arrival", "spread", "coherence")
	fmt.Fprintf(b, row, "Hz", "dB", "ms", "ms", "")
	for _, x := range c.Bands {
		if !x.Carried {
			notCarried(b, figures.BandFigures{Band: x.Band, Gain: x.Gain}, figures.BandFigures{Gain: x.GainErr}, c.NotStated)
			continue
		}
		fmt.Fprintf(b, row, fmt.Sprintf("%g", x.Nominal), cellOf(x.Gain, x.GainErr, 2), cellOf(x.Arrival*toMS, x.ArrivalErr*toMS, 4),
			cellOf(x.Spread*toMS, x.SpreadErr*toMS, 4), decimal(x.Coherence, 3))
	}
}

// CaptureWords says in sentences what a channel of a capture does to timing.
func CaptureWords(c *capture.Result) []string {
	if c.Absent != "" {
		return []string{"Not stated: " + c.Absent + "."}
	}
	return wordsOf(c.Figures, c.Errors, c.Verdicts)
}

// PairWords says in sentences what a channel of a pair does to timing.
func PairWords(r *pair.Report, c *pair.Result) []string {
	if c.Absent != "" {
		return []string{"Not stated: " + c.Absent + "."}
	}
	out := []string{timingWithin(r.FiguresOf(c))}
	if s := nearest(c.Verdicts); s != "" {
		out = append(out, s)
	}
	return out
}
