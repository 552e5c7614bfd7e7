package report

import (
	"fmt"
	"io"
	"slices"
	"strings"

	"fettle/audit"
	"fettle/audit/choose"
	"fettle/audit/limits"
)

// Compare writes a comparison for a terminal: one row a realisation in some
// tables, what must be known of them, and the recommendation. No line is longer
// than Width, and none of figures than narrow.
func Compare(w io.Writer, c *choose.Comparison) error {
	var b strings.Builder
	for _, t := range tablesOf(c) {
		if len(c.Rows) > 0 {
			t.write(&b, c)
			b.WriteByte('\n')
		}
	}
	compareNotes(&b, c)
	recommend(&b, c)
	_, err := io.WriteString(w, b.String())
	return err
}

const (
	// narrow is the most columns that figures take, words apart: those of a usual terminal.
	narrow = 80
	// nameColumn is the width of the rows' names in a comparison.
	nameColumn = 28
)

// comparisonTable sets one row a realisation under two lines of headings.
type comparisonTable []comparisonColumn

type comparisonColumn struct {
	width   int // with the blank before it; 0: stands to the left, two blanks off
	heading [2]string
	name    string // where there is room for it
	cell    func(n *choose.Candidate, r *audit.Result) string
}

// Smear is pink as in an audit's headline, and so are rings. Latency and
// look-ahead are in samples.
var comparisonTables = []comparisonTable{
	{
		{11, [2]string{"off target", "dB"}, "off target, dB", ofResult(func(r *audit.Result) string { return decimal(r.TargetErrorDB, 3) })},
		{10, [2]string{"latency", "removed"}, "latency removed, samples", ofResult(func(r *audit.Result) string { return decimal(r.Latency.Removed, 2) })},
		{7, [2]string{"look-", "ahead"}, "look-ahead, samples", ofResult(func(r *audit.Result) string { return fmt.Sprint(r.Latency.LookAhead) })},
		{11, [2]string{"delay", "spread, ms"}, "delay spread, ms", ofResult(func(r *audit.Result) string { return decimal(r.Figures.DelaySpread*toMS, 3) })},
		{11, [2]string{"phase dev.", "degrees"}, "phase deviation, degrees", ofResult(func(r *audit.Result) string { return decimal(r.Figures.PhaseDeviation, 1) })},
	},
	{
		{11, [2]string{"smear", "ms"}, "smear, ms", ofResult(func(r *audit.Result) string { return decimal(r.Figures.Pink.Total*toMS, 3) })},
		{14, [2]string{"by magnitude", "ms"}, "smear by magnitude, ms", ofResult(func(r *audit.Result) string { return decimal(r.Figures.Pink.Magnitude*toMS, 3) })},
		{11, [2]string{"by phase", "ms"}, "smear by phase, ms", ofResult(func(r *audit.Result) string { return decimal(r.Figures.Pink.Phase*toMS, 3) })},
		{11, [2]string{"sum test", "dB"}, "sum test, dB", ofResult(func(r *audit.Result) string { return decimal(r.Figures.SumTest, 1) })},
	},
	{
		{9, [2]string{"pre-ring", "dB"}, "pre-ring, dB", ofResult(func(r *audit.Result) string { return ringCell(r.Figures.PreRing.Pink.Level) })},
		{9, [2]string{"length", "ms"}, "pre-ring to -60 dB, ms", ofResult(func(r *audit.Result) string { return decimal(r.Figures.PreRing.Pink.Length*toMS, 2) })},
		{12, [2]string{"5 ms ahead", "dB"}, "pre-ring beyond 5 ms, dB", ofResult(func(r *audit.Result) string { return ringCell(r.Figures.PreRing.Pink.Beyond[1]) })},
		{11, [2]string{"post-ring", "dB"}, "post-ring, dB", ofResult(func(r *audit.Result) string { return ringCell(r.Figures.PostRing.Pink.Level) })},
		{9, [2]string{"length", "ms"}, "post-ring to -60 dB, ms", ofResult(func(r *audit.Result) string { return decimal(r.Figures.PostRing.Pink.Length*toMS, 2) })},
	},
	{
		{6, [2]string{"taps", ""}, "taps", ofResult(func(r *audit.Result) string { return fmt.Sprint(r.Taps) })},
		{9, [2]string{"sections", ""}, "sections", ofResult(func(r *audit.Result) string { return fmt.Sprint(r.Sections + r.ZeroSections) })},
		{9, [2]string{"products", "a sample"}, "products a sample", ofResult(func(r *audit.Result) string { return decimal(r.Operations, 0) })},
		{7, [2]string{"x real", "time"}, "times real time", func(n *choose.Candidate, _ *audit.Result) string { return speedCell(n.Speed) }},
		{0, [2]string{"worst margin, of which limit", ""}, "worst margin, of which limit", ofResult(func(r *audit.Result) string { return marginCell(r.Verdicts) })},
	},
}

func ofResult(cell func(r *audit.Result) string) func(*choose.Candidate, *audit.Result) string {
	return func(_ *choose.Candidate, r *audit.Result) string { return cell(r) }
}

func (t comparisonTable) write(b *strings.Builder, c *choose.Comparison) {
	for i, name := range []string{hertz(float64(c.Rate)), ""} {
		t.line(b, name, func(col comparisonColumn) string { return col.heading[i] })
	}
	file := ""
	for _, row := range c.Rows {
		n := row.Shown()
		if several(c) && n.Chain.File != file {
			file = n.Chain.File
			fmt.Fprintf(b, "  %q\n", clip(file, Width-6))
		}
		for _, r := range n.Results {
			t.line(b, rowName(row, r), func(col comparisonColumn) string { return col.cell(n, r) })
		}
	}
}

// line sets one line of a table.
func (t comparisonTable) line(b *strings.Builder, name string, cell func(col comparisonColumn) string) {
	line := fmt.Sprintf("  %-*s", nameColumn, clip(name, nameColumn))
	for _, col := range t {
		if col.width == 0 {
			line += "  " + clip(cell(col), Width-len(line)-2)
		} else {
			line += fmt.Sprintf(" %*s", col.width-1, cell(col))
		}
	}
	fmt.Fprintln(b, strings.TrimRight(line, " "))
}

// CompareTable is a comparison as rows of text, one a figure; the first has the
// realisations' names.
func CompareTable(c *choose.Comparison) [][]string {
	columns := slices.Concat(tablesOf(c)...)
	out := [][]string{{""}}
	for _, col := range columns {
		out = append(out, []string{col.name})
	}
	for _, row := range c.Rows {
		n := row.Shown()
		for _, r := range n.Results {
			out[0] = append(out[0], RowLabel(c, row, r))
			for i, col := range columns {
				out[i+1] = append(out[i+1], col.cell(n, r))
			}
		}
	}
	return out
}

// RowLabel tells a row of a comparison from the others.
func RowLabel(c *choose.Comparison, row *choose.Row, r *audit.Result) string {
	if several(c) {
		return row.Shown().Chain.File + ", " + rowName(row, r)
	}
	return rowName(row, r)
}

// RowName tells a row from the others, whatever the channels.
func RowName(c *choose.Comparison, row *choose.Row) string {
	return RowLabel(c, row, &audit.Result{Shared: true})
}

// several tells whether more than one chain is compared.
func several(c *choose.Comparison) bool {
	return slices.ContainsFunc(c.Rows, func(r *choose.Row) bool { return r.Shown().Chain.File != c.Rows[0].Shown().Chain.File })
}

// rowName lists the realisations of a row, behind the channel where that matters.
func rowName(row *choose.Row, r *audit.Result) string {
	names := strings.Join(row.Names(), ", ")
	switch {
	case r.Channel > 0:
		return fmt.Sprintf("ch %d: %s", r.Channel, names)
	case !r.Shared:
		return "others: " + names
	}
	return names
}

// ringCell is ringLevel where the heading has the unit.
func ringCell(db float64) string { return strings.TrimSuffix(ringLevel(db), " dB") }

func speedCell(times float64) string {
	if times == 0 {
		return "-"
	}
	return decimal(times, 0)
}

// marginCell is the margin to the limit that is most used up, and its name.
func marginCell(verdicts []limits.Verdict) string {
	v, ok := limits.Nearest(verdicts)
	if !ok {
		return "-"
	}
	row := limits.Rows([]limits.Verdict{v})[0]
	return row.Margin + ", " + row.Limit
}
