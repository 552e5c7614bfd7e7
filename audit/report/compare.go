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

// Compare writes a comparison for a terminal: one row a realisation in three
// tables, what must be known of them, and the recommendation. No line is longer
// than Width.
func Compare(w io.Writer, c *choose.Comparison) error {
	var b strings.Builder
	for _, t := range comparisonTables {
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

// nameColumn is the width of the rows' names in a comparison.
const nameColumn = 28

// comparisonTable sets one row a realisation under two lines of headings.
type comparisonTable []comparisonColumn

type comparisonColumn struct {
	width   int // with the blank before it; 0: stands to the left, two blanks off
	heading [2]string
	cell    func(n *choose.Candidate, r *audit.Result) string
}

// Smear is pink as in an audit's headline, and so are rings. Latency and
// look-ahead are in samples.
var comparisonTables = []comparisonTable{
	{
		{11, [2]string{"off target", "dB"}, ofResult(func(r *audit.Result) string { return decimal(r.TargetErrorDB, 3) })},
		{11, [2]string{"latency", "removed"}, ofResult(func(r *audit.Result) string { return decimal(r.Latency.Removed, 2) })},
		{11, [2]string{"look-", "ahead"}, ofResult(func(r *audit.Result) string { return fmt.Sprint(r.Latency.LookAhead) })},
		{11, [2]string{"delay", "spread, ms"}, ofResult(func(r *audit.Result) string { return decimal(r.Figures.DelaySpread*toMS, 3) })},
		{11, [2]string{"phase dev.", "degrees"}, ofResult(func(r *audit.Result) string { return decimal(r.Figures.PhaseDeviation, 1) })},
		{11, [2]string{"sum test", "dB"}, ofResult(func(r *audit.Result) string { return decimal(r.Figures.SumTest, 1) })},
	},
	{
		{8, [2]string{"smear", "ms"}, ofResult(func(r *audit.Result) string { return decimal(r.Figures.Pink.Total*toMS, 3) })},
		{8, [2]string{"by", "magn."}, ofResult(func(r *audit.Result) string { return decimal(r.Figures.Pink.Magnitude*toMS, 3) })},
		{8, [2]string{"by", "phase"}, ofResult(func(r *audit.Result) string { return decimal(r.Figures.Pink.Phase*toMS, 3) })},
		{9, [2]string{"pre-ring", "dB"}, ofResult(func(r *audit.Result) string { return ringCell(r.Figures.PreRing.Pink.Level) })},
		{8, [2]string{"to -60", "dB, ms"}, ofResult(func(r *audit.Result) string { return decimal(r.Figures.PreRing.Pink.Length*toMS, 2) })},
		{9, [2]string{"beyond", "5 ms, dB"}, ofResult(func(r *audit.Result) string { return ringCell(r.Figures.PreRing.Pink.Beyond[1]) })},
		{10, [2]string{"post-ring", "dB"}, ofResult(func(r *audit.Result) string { return ringCell(r.Figures.PostRing.Pink.Level) })},
		{8, [2]string{"to -60", "dB, ms"}, ofResult(func(r *audit.Result) string { return decimal(r.Figures.PostRing.Pink.Length*toMS, 2) })},
	},
	{
		{8, [2]string{"taps", ""}, ofResult(func(r *audit.Result) string { return fmt.Sprint(r.Taps) })},
		{6, [2]string{"sect-", "ions"}, ofResult(func(r *audit.Result) string { return fmt.Sprint(r.Sections + r.ZeroSections) })},
		{7, [2]string{"oper-", "ations"}, ofResult(func(r *audit.Result) string { return decimal(r.Operations, 0) })},
		{7, [2]string{"x real", "time"}, func(n *choose.Candidate, _ *audit.Result) string { return speedCell(n.Speed) }},
		{0, [2]string{"worst margin, of which limit", ""}, ofResult(func(r *audit.Result) string { return marginCell(r.Verdicts) })},
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
	out := [][]string{{""}}
	for _, t := range comparisonTables {
		for _, col := range t {
			out = append(out, []string{strings.TrimSpace(strings.ReplaceAll(col.heading[0]+" "+col.heading[1], "- ", "-"))})
		}
	}
	for _, row := range c.Rows {
		n := row.Shown()
		for _, r := range n.Results {
			out[0] = append(out[0], RowLabel(c, row, r))
			i := 1
			for _, t := range comparisonTables {
				for _, col := range t {
					out[i] = append(out[i], col.cell(n, r))
					i++
				}
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
