package report

import (
	"fmt"
	"io"
	"strconv"

	"fettle/audit/capture"
	"fettle/audit/figures"
	"fettle/audit/pair"
)

// MeasuredCSV is how a table of a capture or a pair begins.
const MeasuredCSV = "recording,rate_hz,channel,"

// measuredChannel is one channel of a capture or a pair.
type measuredChannel struct {
	recording     string
	rate, channel int
	figures, errs *figures.Figures
	snr           func(band int) float64 // nil: has none
	coherence     func(band int) float64
}

func (c measuredChannel) subject() []string {
	return []string{c.recording, strconv.Itoa(c.rate), strconv.Itoa(c.channel)}
}

// captureChannels and pairChannels are the channels that have figures.
func captureChannels(name string, r *capture.Report) (out []measuredChannel) {
	for _, c := range r.Channels {
		if c.Absent == "" {
			out = append(out, measuredChannel{name, c.Rate, c.Channel, c.Figures, c.Errors, func(i int) float64 { return c.Noise[i].SNR }, nil})
		}
	}
	return out
}

func pairChannels(name string, r *pair.Report) (out []measuredChannel) {
	for _, c := range r.Channels {
		if c.Absent == "" {
			f, errs := r.FiguresOf(c)
			out = append(out, measuredChannel{name, r.Rate, c.Channel, f, errs, nil, func(i int) float64 { return c.Bands[i].Coherence }})
		}
	}
	return out
}

// CaptureBandsCSV writes one row a band of every channel. Empty fields are not stated.
func CaptureBandsCSV(w io.Writer, name string, r *capture.Report) error {
	return measuredBands(w, captureChannels(name, r))
}

// PairBandsCSV writes one row a band of every channel. Empty fields are not stated.
func PairBandsCSV(w io.Writer, name string, r *pair.Report) error {
	return measuredBands(w, pairChannels(name, r))
}

// CaptureCurveCSV writes one row a frequency of every channel.
func CaptureCurveCSV(w io.Writer, name string, r *capture.Report) error {
	return measuredCurves(w, captureChannels(name, r))
}

// PairCurveCSV writes one row a frequency of every channel.
func PairCurveCSV(w io.Writer, name string, r *pair.Report) error {
	return measuredCurves(w, pairChannels(name, r))
}

func measuredColumns(columns ...string) []string {
	return append([]string{"recording", "rate_hz", "channel"}, columns...)
}

func measuredBands(w io.Writer, channels []measuredChannel) error {
	rows := [][]string{measuredColumns("centre_hz", "nominal", "carried", "gain_db", "gain_db_err", "arrival_ms", "arrival_ms_err",
		"spread_ms", "spread_ms_err", "pre_ring_ms", "pre_ring_ms_err", "post_ring_ms", "post_ring_ms_err",
		"phase_deviation_deg", "phase_deviation_deg_err", "snr_db", "coherence")}
	at := func(of func(int) float64, i int) float64 {
		if of == nil {
			return nan
		}
		return of(i)
	}
	for _, c := range channels {
		for i, b := range c.figures.Bands {
			e := c.errs.Bands[i]
			row := append(c.subject(), field(b.Centre), field(b.Nominal), fmt.Sprint(b.Carried), field(b.Gain), field(e.Gain))
			for _, x := range []float64{b.Arrival, e.Arrival, b.Spread, e.Spread, b.PreRing, e.PreRing, b.PostRing, e.PostRing} {
				row = append(row, field(x*toMS))
			}
			rows = append(rows, append(row, field(b.PhaseDeviation), field(e.PhaseDeviation), field(at(c.snr, i)), field(at(c.coherence, i))))
		}
	}
	return writeRows(w, rows)
}

func measuredCurves(w io.Writer, channels []measuredChannel) error {
	rows := [][]string{measuredColumns("hz", "magnitude_db", "magnitude_db_err", "phase_deg", "phase_deg_err", "group_delay_ms", "group_delay_ms_err")}
	for _, c := range channels {
		q, e := c.figures.Curve, c.errs.Curve
		for i, hz := range q.Hz {
			rows = append(rows, append(c.subject(), field(hz), field(q.Magnitude[i]), field(e.Magnitude[i]),
				field(q.Phase[i]), field(e.Phase[i]), field(q.GroupDelay[i]*toMS), field(e.GroupDelay[i]*toMS)))
		}
	}
	return writeRows(w, rows)
}
