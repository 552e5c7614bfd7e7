package report

import (
	"fmt"
	"io"
	"math"
	"slices"
	"strings"
	"unicode/utf8"

	"fettle/audit"
	"fettle/audit/figures"
)

// Width is the most columns that a text report takes.
const Width = 100

// Text writes one result for a terminal: sentences, what was built, what it does
// to time as a whole, and band by band. No line is longer than Width.
func Text(w io.Writer, r *audit.Result) error {
	var b strings.Builder
	heading(&b, r)
	whole(&b, r)
	rings(&b, r.Figures)
	limitsTable(&b, r.Verdicts)
	bands(&b, r.Figures.Bands)
	_, err := io.WriteString(w, b.String())
	return err
}

func heading(b *strings.Builder, r *audit.Result) {
	title := fmt.Sprintf("%s, %s, %s", clip(r.Chain, 48), r.Phase, place(r))
	titled(b, title)
	sentences(b, Words(r))
	b.WriteByte('\n')
	fmt.Fprintf(b, "  %-22s %s\n", "built as", builtOf(r))
	if r.Character != "" {
		fmt.Fprintf(b, "  %-22s %s\n", "which is", r.Character)
	}
	fmt.Fprintf(b, "  %-22s about %.0f multiplications a sample\n", "at a cost of", r.Operations)
	label := "notes"
	for _, note := range append(slices.Clone(r.Notes), r.Warnings...) {
		b.WriteString(fieldLines(label, note))
		label = ""
	}
	fmt.Fprintf(b, "  %-22s %s dB (tolerance %g dB)\n", "off target by at most", decimal(r.TargetErrorDB, 3), r.ToleranceDB)
}

// place names a result's rate, and its channel where that matters.
func place(r *audit.Result) string {
	at := hertz(float64(r.Rate))
	switch {
	case r.Channel > 0:
		return fmt.Sprintf("%s ch %d", at, r.Channel)
	case !r.Shared:
		return at + " others"
	}
	return at
}

func builtOf(r *audit.Result) string {
	var parts []string
	if r.Taps > 0 {
		parts = append(parts, fmt.Sprintf("a kernel of %d taps", r.Taps))
	}
	if r.Sections > 0 {
		parts = append(parts, fmt.Sprintf("%d second-order sections", r.Sections))
	}
	if r.ZeroSections > 0 {
		parts = append(parts, fmt.Sprintf("%d second-order sections run forward and backward", r.ZeroSections))
	}
	if r.Delay > 0 {
		parts = append(parts, fmt.Sprintf("a wanted delay of %d samples", r.Delay))
	}
	if parts == nil {
		return "nothing: every sample passes as it is"
	}
	return strings.Join(parts, ", ")
}

func whole(b *strings.Builder, r *audit.Result) {
	f, l := r.Figures, r.Latency
	row := func(name, format string, args ...any) {
		fmt.Fprintf(b, "  %-22s %s\n", name, fmt.Sprintf(format, args...))
	}
	row("latency removed", "%s samples (%s), %s left", decimal(l.Removed, 2), milliseconds(l.Removed/float64(r.Rate)), decimal(l.Residual, 2))
	row("polarity", "%s", polarityOf(f))
	row("delay spread", "%s over the carried bands", milliseconds(f.DelaySpread))
	row("phase deviation", "%s degrees in the worst carried band", decimal(f.PhaseDeviation, 1))
	row("smear, pink", "%s", smearOf(f.Pink))
	row("smear, white", "%s", smearOf(f.White))
	row("90 / 99.9 % of energy", "within %s / %s", milliseconds(f.D90), milliseconds(f.D999))
	row("energy ahead", "%s before the aligned instant (-60 dB)", milliseconds(f.Lead))
	row("sum test", "%s dB: deepest loss when mixed 1:1 with the untreated", decimal(f.SumTest, 1))
	row("probes disagree by", "%s (impulse, chirp), %s (impulse, formula)", microseconds(r.Disagreement), microseconds(r.AnalyticDisagreement))
}

func polarityOf(f *figures.Figures) string {
	switch f.Polarity {
	case 1:
		return "kept"
	case -1:
		return "inverted"
	}
	return "not stated"
}

func smearOf(s figures.Smear) string {
	return fmt.Sprintf("%s = magnitude %s and phase %s", milliseconds(s.Total), milliseconds(s.Magnitude), milliseconds(s.Phase))
}

// rings tables early and late energy.
func rings(b *strings.Builder, f *figures.Figures) {
	fmt.Fprintf(b, "\n  %-18s %10s %12s   %s\n", "", "level", "to -60 dB", "energy beyond 2 / 5 / 20 ms")
	line := func(name string, c figures.RingColumn) {
		fmt.Fprintf(b, "  %-18s %10s %12s   %s\n", name, ringLevel(c.Level), milliseconds(c.Length),
			strings.Join([]string{ringLevel(c.Beyond[0]), ringLevel(c.Beyond[1]), ringLevel(c.Beyond[2])}, " / "))
	}
	line("pre-ring, white", f.PreRing.White)
	line("pre-ring, pink", f.PreRing.Pink)
	line("post-ring, white", f.PostRing.White)
	line("post-ring, pink", f.PostRing.Pink)
}

func bands(b *strings.Builder, bands []figures.BandFigures) {
	fmt.Fprintf(b, "\n  %8s %9s %12s %12s %12s %12s %9s\n", "band", "gain", "arrival", "spread", "pre-ring", "post-ring", "phase")
	fmt.Fprintf(b, "  %8s %9s %12s %12s %12s %12s %9s\n", "Hz", "dB", "ms", "ms", "ms", "ms", "degrees")
	for _, x := range bands {
		if !x.Carried {
			fmt.Fprintf(b, "  %8g %9s %12s\n", x.Nominal, decimal(x.Gain, 1), "not carried")
			continue
		}
		fmt.Fprintf(b, "  %8g %9s %12s %12s %12s %12s %9s\n", x.Nominal, decimal(x.Gain, 2),
			decimal(x.Arrival*toMS, 4), decimal(x.Spread*toMS, 4), decimal(x.PreRing*toMS, 2), decimal(x.PostRing*toMS, 2),
			decimal(x.PhaseDeviation, 1))
	}
}

func hertz(hz float64) string {
	if hz >= 1000 {
		return fmt.Sprintf("%g kHz", hz/1000)
	}
	return fmt.Sprintf("%g Hz", hz)
}

// decimal prints a figure, a dash where it is not stated. What rounds to zero
// has no sign.
func decimal(x float64, digits int) string {
	if math.IsNaN(x) {
		return "-"
	}
	s := fmt.Sprintf("%.*f", digits, x)
	if strings.Trim(s, "-0.") == "" {
		s = strings.TrimPrefix(s, "-")
	}
	return s
}

func milliseconds(seconds float64) string { return decimal(seconds*toMS, 3) + " ms" }

func microseconds(seconds float64) string {
	if math.IsNaN(seconds) {
		return "not stated"
	}
	if us := seconds * toUS; us >= 1 {
		return fmt.Sprintf("%.0f us", us)
	}
	return fmt.Sprintf("%.1g us", seconds*toUS)
}

func ringLevel(db float64) string {
	switch {
	case math.IsNaN(db):
		return "-"
	case db <= figures.None:
		return "none"
	}
	return decimal(db, 1) + " dB"
}

// wrapped breaks text into lines of at most n characters at its blanks.
func wrapped(text string, n int) []string {
	var lines []string
	line := ""
	for _, word := range strings.Fields(text) {
		if line != "" && utf8.RuneCountInString(line)+1+utf8.RuneCountInString(word) > n {
			lines, line = append(lines, line), ""
		}
		if line != "" {
			line += " "
		}
		line += word
	}
	return append(lines, line)
}

// clip shortens a name to n characters.
func clip(name string, n int) string {
	r := []rune(name)
	if len(r) <= n {
		return name
	}
	return string(r[:n-3]) + "..."
}
