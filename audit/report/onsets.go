package report

import (
	"fmt"
	"io"
	"math"
	"strings"

	"fettle/audit/figures"
	"fettle/audit/onsets"
)

// Onsets writes what became of a recording's onsets, a row a channel and figure.
func Onsets(w io.Writer, recording string, r *onsets.Report) error {
	var b strings.Builder
	fmt.Fprintf(&b, "onsets of %s\n", clip(recording, Width-10))
	for _, c := range r.Channels {
		onsetsOf(&b, c)
	}
	_, err := io.WriteString(w, b.String())
	return err
}

func onsetsOf(b *strings.Builder, c *onsets.Channel) {
	fmt.Fprintf(b, "  channel %d: %d onsets; %d more not clear enough, %d too weak, %d lost and %d blurred in the output\n",
		c.Channel, c.Onsets, c.Unclear, c.Weak, c.Lost, c.Blurred)
	fmt.Fprintf(b, "  %-34s %8s %12s %12s %12s   %s\n", "", "stated", "median", "95 %", "worst", "at")
	times := func(name string, s onsets.Summary) {
		fmt.Fprintf(b, "  %-34s %8d %12s %12s %12s   %s\n", name, s.Count, orDash(s.Median, milliseconds), orDash(s.Percentile95, milliseconds), orDash(s.Worst, milliseconds), at(s))
	}
	times("shift", c.Shift)
	times("rise, 10 to 90 %, in the original", c.Rise)
	times("change of the rise", c.RiseChange)
	for i, t := range onsets.EarlyTimes {
		s := c.Early[i]
		fmt.Fprintf(b, "  %-34s %8d %12s %12s %12s   %s\n", fmt.Sprintf("energy more than %g ms early", t*toMS), s.Count,
			early(s.Median), early(s.Percentile95), early(s.Worst), at(s))
	}
	fmt.Fprintf(b, "  %-34s %8d %12s\n", "  it would be seen above", c.Floor.Count, early(c.Floor.Median))
	if c.Onsets < fewOnsets {
		fmt.Fprintf(b, "  A median wants 5 onsets, a 95th percentile 20: use a longer recording.\n")
	}
}

// fewOnsets is how many onsets all figures want.
const fewOnsets = 20

// orDash is a dash for what is not.
func orDash(x float64, text func(float64) string) string {
	if math.IsNaN(x) {
		return "-"
	}
	return text(x)
}

// early is a level re the onset's own energy.
func early(db float64) string {
	if db == figures.None {
		return "none seen"
	}
	return ringLevel(db)
}

func at(s onsets.Summary) string {
	if s.Count == 0 {
		return "-"
	}
	return fmt.Sprintf("%s s", decimal(s.WorstTime, 3))
}

type onsetsDocument struct {
	Recording string    `json:"recording"`
	Channels  []onsetsJ `json:"channels"`
}

type onsetsJ struct {
	Channel      int                `json:"channel"`
	Found        int                `json:"found"`
	Unclear      int                `json:"unclear"`
	Weak         int                `json:"weak"`
	Lost         int                `json:"lost"`
	Blurred      int                `json:"blurred"`
	ShiftMS      summary            `json:"shift_ms"`
	RiseMS       summary            `json:"rise_ms"`
	RiseChangeMS summary            `json:"rise_change_ms"`
	EarlyDB      map[string]summary `json:"early_db"`
	EarlyFloorDB summary            `json:"early_floor_db"`
	NotStated    map[string]string  `json:"not_stated"`
}

type summary struct {
	Count    int    `json:"count"`
	Median   number `json:"median"`
	P95      number `json:"p95"`
	Worst    number `json:"worst"`
	WorstAtS number `json:"worst_at_s"`
}

func summaryOf(s onsets.Summary, scale float64) summary {
	return summary{s.Count, number(s.Median * scale), number(s.Percentile95 * scale), number(s.Worst * scale), number(s.WorstTime)}
}

func onsetsJSON(recording string, r *onsets.Report) *onsetsDocument {
	if r == nil {
		return nil
	}
	out := &onsetsDocument{Recording: recording}
	for _, c := range r.Channels {
		j := onsetsJ{
			Channel: c.Channel, Found: c.Onsets, Unclear: c.Unclear, Weak: c.Weak, Lost: c.Lost, Blurred: c.Blurred,
			ShiftMS: summaryOf(c.Shift, toMS), RiseMS: summaryOf(c.Rise, toMS), RiseChangeMS: summaryOf(c.RiseChange, toMS),
			EarlyDB: map[string]summary{}, EarlyFloorDB: summaryOf(c.Floor, 1), NotStated: c.NotStated,
		}
		for i, t := range onsets.EarlyTimes {
			j.EarlyDB[fmt.Sprintf("%g", t*toMS)] = summaryOf(c.Early[i], 1)
		}
		out.Channels = append(out.Channels, j)
	}
	return out
}
