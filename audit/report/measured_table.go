package report

import (
	"fmt"

	"fettle/audit/capture"
	"fettle/audit/figures"
	"fettle/audit/pair"
)

// CaptureTable gives a capture's figures as rows of text, one column a channel; the
// first row has their names.
func CaptureTable(r *capture.Report) [][]string {
	channels := captureChannels("", r)
	places := map[int]*capture.Result{}
	for _, c := range r.Channels {
		places[c.Channel] = c
	}
	rows := measuredTable(channels)
	row := func(name string, cell func(c *capture.Result) string) {
		cells := []string{name}
		for _, c := range channels {
			cells = append(cells, cell(places[c.channel]))
		}
		rows = append(rows, cells)
	}
	row("latency, samples", func(c *capture.Result) string { return plusMinus(c.Latency, c.LatencyErr, 4) })
	if len(channels) > 1 {
		row("after the first channel, samples", func(c *capture.Result) string { return plusMinus(c.Behind, c.BehindErr, 4) })
	}
	row("clock drift, ppm", func(*capture.Result) string { return plusMinus(r.Drift.PPM, r.Drift.Err, 3) })
	for i := range mostProducts(r) {
		row(fmt.Sprintf("distortion of order %d, dB", i+2), func(c *capture.Result) string {
			if i >= len(c.Products) {
				return "not stated"
			}
			return plusMinus(c.Products[i].Level, c.Products[i].Err, 1)
		})
	}
	row("limits", func(c *capture.Result) string { return limitsCell(c.Verdicts) })
	return rows
}

// mostProducts is how many orders of distortion any channel tells of, from the second on.
func mostProducts(r *capture.Report) (most int) {
	for _, c := range r.Channels {
		most = max(most, len(c.Products))
	}
	return most
}

// PairTable gives a pair's figures as rows of text, one column a channel; the first
// row has their names.
func PairTable(r *pair.Report) [][]string {
	rows := [][]string{{""}, {"verdict"}, {"delay, samples"}, {"gain, dB"}, {"coherence"}, {"polarity"}, {"delay spread"}, {"limits"}}
	for _, c := range r.Channels {
		cells := []string{fmt.Sprintf("channel %d", c.Channel), string(r.Verdict), plusMinus(c.Delay, c.DelayErr, 4), plusMinus(c.Gain, c.GainErr, 3),
			decimal(c.Coherence, 3), polarityOf(&figures.Figures{Polarity: c.Polarity}), plusMinusMS(c.DelaySpread, c.DelaySpreadErr), limitsCell(c.Verdicts)}
		if c.Absent != "" {
			cells = []string{cells[0], c.Absent, "", "", "", "", "", ""}
		}
		for i := range rows {
			rows[i] = append(rows[i], cells[i])
		}
	}
	return rows
}

// measuredTable has what captures' figures as a whole have in common.
func measuredTable(channels []measuredChannel) [][]string {
	head := []string{""}
	for _, c := range channels {
		head = append(head, fmt.Sprintf("channel %d", c.channel))
	}
	rows := [][]string{head}
	for _, x := range []struct {
		name string
		cell func(f, e *figures.Figures) string
	}{
		{"polarity", func(f, _ *figures.Figures) string { return polarityOf(f) }},
		{"delay spread", func(f, e *figures.Figures) string { return plusMinusMS(f.DelaySpread, e.DelaySpread) }},
		{"phase deviation, degrees", func(f, e *figures.Figures) string { return plusMinus(f.PhaseDeviation, e.PhaseDeviation, 2) }},
		{"smear, pink", func(f, e *figures.Figures) string { return plusMinusMS(f.Pink.Total, e.Pink.Total) }},
		{"of it by phase", func(f, e *figures.Figures) string { return plusMinusMS(f.Pink.Phase, e.Pink.Phase) }},
		{"pre-ring to -60 dB, white", func(f, e *figures.Figures) string { return plusMinusMS(f.PreRing.White.Length, e.PreRing.White.Length) }},
		{"post-ring to -60 dB, white", func(f, e *figures.Figures) string {
			return plusMinusMS(f.PostRing.White.Length, e.PostRing.White.Length)
		}},
		{"sum test, dB", func(f, e *figures.Figures) string { return plusMinus(f.SumTest, e.SumTest, 2) }},
	} {
		cells := []string{x.name}
		for _, c := range channels {
			cells = append(cells, x.cell(c.figures, c.errs))
		}
		rows = append(rows, cells)
	}
	return rows
}
