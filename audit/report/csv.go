package report

import (
	"encoding/csv"
	"fmt"
	"io"
	"math"
	"strconv"

	"fettle/audit"
)

// BandsCSV writes one row a band of every result. Empty fields are not stated.
func BandsCSV(w io.Writer, results []*audit.Result) error {
	rows := [][]string{append(subjectColumns(), "centre_hz", "nominal", "carried", "gain_db", "arrival_ms", "spread_ms", "pre_ring_ms", "post_ring_ms", "phase_deviation_deg")}
	for _, r := range results {
		for _, b := range r.Figures.Bands {
			rows = append(rows, append(subject(r), field(b.Centre), field(b.Nominal), fmt.Sprint(b.Carried), field(b.Gain),
				field(b.Arrival*toMS), field(b.Spread*toMS), field(b.PreRing*toMS), field(b.PostRing*toMS), field(b.PhaseDeviation)))
		}
	}
	return writeRows(w, rows)
}

// CurveCSV writes one row a frequency of every result's curve.
func CurveCSV(w io.Writer, results []*audit.Result) error {
	rows := [][]string{append(subjectColumns(), "hz", "magnitude_db", "phase_deg", "group_delay_ms")}
	for _, r := range results {
		c := r.Figures.Curve
		for i, hz := range c.Hz {
			rows = append(rows, append(subject(r), field(hz), field(c.Magnitude[i]), field(c.Phase[i]), field(c.GroupDelay[i]*toMS)))
		}
	}
	return writeRows(w, rows)
}

func subjectColumns() []string { return []string{"chain", "phase", "rate_hz", "channel", "stage"} }

// subject says what a row is about; the channel is empty for all that no stage
// names.
func subject(r *audit.Result) []string {
	channel := ""
	if r.Channel > 0 {
		channel = strconv.Itoa(r.Channel)
	}
	return []string{r.Chain, string(r.Phase), strconv.Itoa(r.Rate), channel, r.Stage}
}

func field(x float64) string {
	if math.IsNaN(x) || math.IsInf(x, 0) {
		return ""
	}
	return strconv.FormatFloat(x, 'g', 9, 64)
}

func writeRows(w io.Writer, rows [][]string) error {
	out := csv.NewWriter(w)
	if err := out.WriteAll(rows); err != nil {
		return err
	}
	return out.Error()
}
