package report

import (
	"bytes"
	"encoding/csv"
	"encoding/json"
	"math"
	"slices"
	"strconv"
	"testing"
)

// TestComparedOnsetsByPath: each path's row has the worst of the channels that it treats, and CSV, JSON
// and table have the same figures.
func TestComparedOnsetsByPath(t *testing.T) {
	const chain = "phase: iir\nstages:\n  - lowpass: {at: 6 kHz, order: 2}\n  - delay: {by: 3 ms, channels: [2]}\n"
	c := heardComparison(t, "deck/slate_and_gangway.wav", 48000, chain)
	n := c.Rows[0].Shown()
	if len(n.Results) != 2 || len(n.Onsets.Channels) != 2 {
		t.Fatalf("%d paths, %d channels", len(n.Results), len(n.Onsets.Channels))
	}
	for i, r := range n.Results {
		channel := r.Channel
		if channel == 0 { // the others: there is but one
			channel = 1
		}
		of, h := n.Onsets.Channels[channel-1], heardOf(n, r)
		if h.onsets != of.Onsets || h.shift != of.Shift.Worst || h.rise != of.RiseChange.Worst || h.onsets < 3 {
			t.Errorf("path %d has %+v of channel %d: %+v", i, h, channel, of)
		}
		if late := h.shift > 2.5e-3; late != (channel == 2) { // channel 2 is 3 ms later
			t.Errorf("path %d, channel %d: onsets are shifted by %g s at worst", i, channel, h.shift)
		}
	}
	var rows, doc bytes.Buffer
	if err := CompareCSV(&rows, c); err != nil {
		t.Fatal(err)
	}
	if err := CompareJSON(&doc, c, "1.2.3"); err != nil {
		t.Fatal(err)
	}
	cells, err := csv.NewReader(&rows).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var read struct {
		Rows []struct {
			Onsets struct {
				Channels []struct {
					Found int
					Shift struct{ Worst float64 } `json:"shift_ms"`
				}
			}
		}
	}
	if err := json.Unmarshal(doc.Bytes(), &read); err != nil {
		t.Fatal(err)
	}
	at := func(row int, column string) string { return cells[row][slices.Index(cells[0], column)] }
	for i, r := range n.Results {
		of := read.Rows[0].Onsets.Channels[max(r.Channel, 1)-1]
		if at(i+1, "onsets") != strconv.Itoa(of.Found) || at(i+1, "onset_shift_ms_worst") != strconv.FormatFloat(of.Shift.Worst, 'g', 9, 64) {
			t.Errorf("CSV row %v, JSON %+v", cells[i+1], of)
		}
	}
}

func TestLarger(t *testing.T) {
	nan := math.NaN()
	for _, c := range [][3]float64{{1, -2, -2}, {-2, 1, -2}, {nan, 0.5, 0.5}, {0.5, nan, 0.5}} {
		if got := larger(c[0], c[1]); got != c[2] {
			t.Errorf("of %g and %g, %g", c[0], c[1], got)
		}
	}
}

// TestFiguresFitATerminal of 80 columns: all but the words at the end of a line.
func TestFiguresFitATerminal(t *testing.T) {
	for i, table := range append(slices.Clone(comparisonTables), onsetTable) {
		width := 2 + nameColumn
		for _, col := range table {
			width += col.width
			for _, h := range col.heading {
				if col.width > 0 && len(h) >= col.width {
					t.Errorf("table %d: no blank before %q", i+1, h)
				}
			}
		}
		if width > narrow {
			t.Errorf("table %d takes %d columns", i+1, width)
		}
	}
}
