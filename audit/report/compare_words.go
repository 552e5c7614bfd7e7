package report

import (
	"fmt"
	"slices"
	"strings"

	"fettle/audit/choose"
	"fettle/audit/limits"
)

// CompareTitle names what is compared, as a heading.
func CompareTitle(c *choose.Comparison) string {
	var chains []string
	count := 0
	for _, row := range c.Rows {
		count += len(row.Candidates)
		if name := row.Shown().Chain.Name; !slices.Contains(chains, name) {
			chains = append(chains, name)
		}
	}
	if count == 1 {
		return fmt.Sprintf("%s: one realisation at %s", listed(chains), hertz(float64(c.Rate)))
	}
	return strings.TrimPrefix(fmt.Sprintf("%s: %d realisations side by side at %s", listed(chains), count, hertz(float64(c.Rate))), ": ")
}

// compareNotes says what a reader of the tables must know.
func compareNotes(b *strings.Builder, c *choose.Comparison) {
	for _, s := range CompareNotes(c) {
		paragraph(b, s)
	}
}

// CompareNotes are the sentences under a comparison's tables: which realisations
// agree, what mixed does, what is refused, and what the speed is.
func CompareNotes(c *choose.Comparison) []string {
	var out []string
	for _, row := range c.Rows {
		if names := row.Names(); len(names) > 1 {
			out = append(out, fmt.Sprintf("%s%s agree within their tolerances, %s dB apart at most: one row, with the figures of %s, which costs least.",
				whose(c, row.Shown()), listed(names), decimal(row.Apart, 3), names[0]))
		}
		for _, n := range row.Candidates {
			if s := choicesOf(n); s != "" {
				out = append(out, whose(c, n)+s)
			}
		}
	}
	for _, n := range c.Refused {
		out = append(out, fmt.Sprintf("%s%s is refused: %v.", whose(c, n), n.Name, n.Refused))
	}
	if len(c.Rows) == 0 {
		return out
	}
	if c.Recording != "" {
		out = append(out, onsetsWords(c))
	}
	return append(out, fmt.Sprintf("Latency and look-ahead are in samples, products are multiplications; smear and rings are pink-weighted. A ring's length is to where the energy beyond is -60 dB of all. The speed, in multiples of real time, was measured here and now by one thread under the kernel %v: it differs from run to run.", c.Kernel))
}

// whose names the chain where there are several.
func whose(c *choose.Comparison, n *choose.Candidate) string {
	if !several(c) {
		return ""
	}
	return fmt.Sprintf("%q: ", n.Chain.File)
}

// choicesOf says what mixed does with which stages.
func choicesOf(n *choose.Candidate) string {
	var late, even []string
	for _, choice := range n.Choices {
		if choice.Ring > choose.LongRing {
			late = append(late, fmt.Sprintf("%s as %s (it rings %s)", choice.Stage, choice.Phase, milliseconds(choice.Ring)))
		} else {
			even = append(even, choice.Stage)
		}
	}
	switch {
	case n.Choices == nil:
		return ""
	case late == nil:
		return fmt.Sprintf("mixed has every stage linear: none rings for longer than %s.", milliseconds(choose.LongRing))
	case even == nil:
		return fmt.Sprintf("mixed has every stage ring after the sound: %s.", strings.Join(late, "; "))
	}
	return fmt.Sprintf("mixed has %s; and linear %s.", strings.Join(late, "; "), strings.Join(even, "; "))
}

// caution stands under every advice.
const caution = "Rules know figures only: listen before you commit a batch."

// recommend writes the advice.
func recommend(b *strings.Builder, c *choose.Comparison) {
	b.WriteByte('\n')
	if a := c.Asked(); a != nil {
		for _, s := range AdviceWords(c, a) {
			paragraph(b, s)
		}
	} else {
		eachPurpose(b, c)
	}
	paragraph(b, caution)
}

// eachPurpose is a table of one row a purpose.
func eachPurpose(b *strings.Builder, c *choose.Comparison) {
	fmt.Fprintf(b, "  %-10s %-*s %s\n", "for", nameColumn, "take", "what is tried before fails")
	for _, a := range c.Advice {
		fmt.Fprintf(b, "  %-10s %-*s %s\n", a.Rule.Purpose, nameColumn, clip(taken(c, a), nameColumn), clip(before(c, a), Width-14-nameColumn))
	}
	b.WriteString("  --for says what each asks for, and by how much the others fail.\n")
}

// taken names the row that is recommended.
func taken(c *choose.Comparison, a *choose.Advice) string {
	if a.Chosen == nil {
		return "none"
	}
	return named(c, a.Chosen.Row)
}

func named(c *choose.Comparison, row *choose.Row) string {
	return whose(c, row.Shown()) + listed(row.Names())
}

// before says why the first that was tried is not the one chosen.
func before(c *choose.Comparison, a *choose.Advice) string {
	if len(a.Judged) == 0 || a.Judged[0].Keeps {
		return "-"
	}
	n := a.Judged[0].Row.Shown()
	return whose(c, n) + n.Name + " " + misses(a.Judged[0])[0].briefly
}

// AdviceWords says in sentences which realisation a purpose asks for, why, and by
// how much the others fail.
func AdviceWords(c *choose.Comparison, a *choose.Advice) []string {
	out := headline(c, a)
	var later []string
	for _, j := range a.Judged {
		switch {
		case a.Chosen != nil && j.Row == a.Chosen.Row:
		case j.Keeps:
			later = append(later, named(c, j.Row))
		default:
			out = append(out, named(c, j.Row)+": "+missed(j)+".")
		}
	}
	if later != nil {
		out = append(out, "Later in the order, and within all limits too: "+strings.Join(later, "; ")+".")
	}
	return out
}

func headline(c *choose.Comparison, a *choose.Advice) []string {
	purpose := "By the limits"
	if a.Rule.Purpose != choose.Own {
		purpose = fmt.Sprintf("For %s (%s)", a.Rule.Purpose, a.Rule.Meaning)
	}
	if len(a.Judged) == 0 {
		return []string{purpose + " nothing can be recommended: every realisation is refused."}
	}
	order := fmt.Sprintf("The order is %s: %s.", strings.Join(a.Rule.Order, ", "), a.Rule.Why)
	if a.Chosen == nil {
		return []string{fmt.Sprintf("%s no realisation keeps %s. Nearest is %s. %s", purpose, kept(a.Judged[0]), named(c, a.Nearest().Row), order)}
	}
	words := []string{fmt.Sprintf("%s take %s: the first to keep %s. %s", purpose, named(c, a.Chosen.Row), kept(*a.Chosen), order)}
	for _, r := range a.Chosen.Row.Shown().Results {
		words = append(words, timing(r))
	}
	return words
}

// kept lists the limits in force.
func kept(j choose.Judgement) string {
	var names []string
	for _, v := range j.Verdicts[0] {
		names = append(names, v.Name)
	}
	return listed(names)
}

// miss is a limit that a row fails, in words.
type miss struct{ briefly, worst string }

func misses(j choose.Judgement) []miss {
	var out []miss
	verdicts := j.Missed()
	for i, row := range limits.Rows(verdicts) {
		m := miss{briefly: row.Limit + " is " + row.Verdict}
		if verdicts[i].Outcome == limits.Exceeded {
			m = miss{fmt.Sprintf("misses %s by %s", row.Limit, strings.TrimPrefix(row.Margin, "-")), " (" + row.Worst + ")"}
		}
		out = append(out, m)
	}
	return out
}

// missed says by how much a row fails.
func missed(j choose.Judgement) string {
	var parts []string
	for _, m := range misses(j) {
		parts = append(parts, m.briefly+m.worst)
	}
	return strings.Join(parts, "; ")
}

// listed joins names by commas and a last "and".
func listed(names []string) string {
	if len(names) < 2 {
		return strings.Join(names, "")
	}
	last := len(names) - 1
	return strings.Join(slices.Clone(names[:last]), ", ") + " and " + names[last]
}

// paragraph sets a sentence within Width, what follows its first line further in.
func paragraph(b *strings.Builder, s string) {
	for i, line := range wrapped(s, Width-4) {
		fmt.Fprintf(b, "%s%s\n", [...]string{"  ", "    "}[min(i, 1)], line)
	}
}
