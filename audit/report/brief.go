package report

import (
	"fmt"
	"io"
	"strings"

	"fettle/audit"
	"fettle/audit/figures"
)

// briefColumns is how many results stand side by side within Width.
const briefColumns = 4

// Brief writes the whole-chain figures of several results side by side, one
// column a rate or way of treatment: what render shows of its audit.
func Brief(w io.Writer, results []*audit.Result) error {
	var b strings.Builder
	for len(results) > 0 {
		n := min(briefColumns, len(results))
		for _, row := range briefRows {
			fmt.Fprintf(&b, "  %-27s", row.name)
			for _, r := range results[:n] {
				fmt.Fprintf(&b, " %16s", row.cell(r))
			}
			b.WriteByte('\n')
		}
		results = results[n:]
	}
	_, err := io.WriteString(w, b.String())
	return err
}

// BriefTable gives the same figures as rows of text, the first with the names of
// the columns.
func BriefTable(results []*audit.Result) [][]string {
	var out [][]string
	for _, row := range briefRows {
		cells := []string{row.name}
		for _, r := range results {
			cells = append(cells, row.cell(r))
		}
		out = append(out, cells)
	}
	return out
}

// Label tells a result from others of its chain.
func Label(r *audit.Result) string { return string(r.Phase) + ", " + place(r) }

var briefRows = []struct {
	name string
	cell func(r *audit.Result) string
}{
	{"", place},
	{"realised as", func(r *audit.Result) string { return string(r.Phase) }},
	{"taps / sections", func(r *audit.Result) string { return fmt.Sprintf("%d / %d", r.Taps, r.Sections+r.ZeroSections) }},
	{"multiplications a sample", func(r *audit.Result) string { return decimal(r.Operations, 0) }},
	{"off target, dB", func(r *audit.Result) string { return decimal(r.TargetErrorDB, 3) }},
	{"latency removed, samples", func(r *audit.Result) string { return decimal(r.Latency.Removed, 2) }},
	{"latency left, samples", func(r *audit.Result) string { return decimal(r.Latency.Residual, 2) }},
	{"polarity", func(r *audit.Result) string { return polarityOf(r.Figures) }},
	{"delay spread", ofFigures(func(f *figures.Figures) string { return milliseconds(f.DelaySpread) })},
	{"phase deviation, degrees", ofFigures(func(f *figures.Figures) string { return decimal(f.PhaseDeviation, 1) })},
	{"smear, pink", ofFigures(func(f *figures.Figures) string { return milliseconds(f.Pink.Total) })},
	{"  of it by phase", ofFigures(func(f *figures.Figures) string { return milliseconds(f.Pink.Phase) })},
	{"pre-ring to -60 dB, white", ofFigures(func(f *figures.Figures) string { return milliseconds(f.PreRing.White.Length) })},
	{"pre-ring beyond 5 ms, white", ofFigures(func(f *figures.Figures) string { return ringLevel(f.PreRing.White.Beyond[1]) })},
	{"post-ring to -60 dB, white", ofFigures(func(f *figures.Figures) string { return milliseconds(f.PostRing.White.Length) })},
	{"sum test, dB", ofFigures(func(f *figures.Figures) string { return decimal(f.SumTest, 1) })},
	{"limits", func(r *audit.Result) string { return limitsCell(r.Verdicts) }},
	{"probes disagree by", func(r *audit.Result) string { return microseconds(r.Disagreement) }},
}

func ofFigures(cell func(f *figures.Figures) string) func(*audit.Result) string {
	return func(r *audit.Result) string { return cell(r.Figures) }
}
