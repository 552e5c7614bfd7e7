package report

import (
	"io"
	"strconv"
	"strings"

	"fettle/audit/choose"
	"fettle/audit/limits"
)

// CompareCSV writes one row a realisation, or for a chain that treats channels
// apart one a channel. The realisations that share a row stand in its phase, parted
// by blanks. Empty fields are not stated.
func CompareCSV(w io.Writer, c *choose.Comparison) error {
	rows := [][]string{append(subjectColumns(), strings.Fields(`file target_error_db latency_samples look_ahead_samples
		delay_spread_ms phase_deviation_deg smear_pink_ms smear_pink_magnitude_ms smear_pink_phase_ms
		pre_ring_pink_db pre_ring_pink_ms pre_ring_pink_beyond_5_ms_db post_ring_pink_db post_ring_pink_ms
		sum_test_db onsets onsets_lost_or_blurred onset_shift_ms_median onset_shift_ms_worst onset_rise_change_ms_worst
		onset_early_beyond_5_ms_db_worst worst_limit worst_limit_margin worst_limit_unit taps sections operations times_real_time recommended_for`)...)}
	for _, row := range c.Rows {
		n := row.Shown()
		for _, r := range n.Results {
			f, pre, post := r.Figures, r.Figures.PreRing.Pink, r.Figures.PostRing.Pink
			about := subject(r)
			about[1] = strings.Join(row.Names(), " ")
			limit, margin, unit := "", "", ""
			if v, ok := limits.Nearest(r.Verdicts); ok {
				limit, margin, unit = v.Name, field(v.Margin), v.Unit
			}
			timing := append(about, n.Chain.File,
				field(r.TargetErrorDB), field(r.Latency.Removed), strconv.Itoa(r.Latency.LookAhead),
				field(f.DelaySpread*toMS), field(f.PhaseDeviation), field(f.Pink.Total*toMS), field(f.Pink.Magnitude*toMS), field(f.Pink.Phase*toMS),
				field(pre.Level), field(pre.Length*toMS), field(pre.Beyond[1]), field(post.Level), field(post.Length*toMS),
				field(f.SumTest))
			rows = append(rows, append(append(timing, onsetFields(n, r)...), limit, margin, unit,
				strconv.Itoa(r.Taps), strconv.Itoa(r.Sections+r.ZeroSections), field(r.Operations), speedField(n.Speed), recommendedFor(c, row)))
		}
	}
	return writeRows(w, rows)
}

// speedField is empty where no speed was measured.
func speedField(times float64) string {
	if times == 0 {
		return ""
	}
	return field(times)
}

// recommendedFor lists the purposes that a row is recommended for; "limits" where
// only those were given.
func recommendedFor(c *choose.Comparison, row *choose.Row) string {
	var out []string
	for _, a := range c.Advice {
		if a.Chosen != nil && a.Chosen.Row == row {
			out = append(out, purposeKey(a))
		}
	}
	return strings.Join(out, " ")
}

func purposeKey(a *choose.Advice) string {
	if a.Rule.Purpose == choose.Own {
		return "limits"
	}
	return string(a.Rule.Purpose)
}
