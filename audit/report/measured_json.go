package report

import (
	"io"

	"fettle/audit/capture"
	"fettle/audit/pair"
	"fettle/audit/probe"
)

// captureDocument is what is known of a capture as a whole.
type captureDocument struct {
	File      string           `json:"file"`
	ProbeFile string           `json:"probe_file"`
	Probe     probe.Parameters `json:"probe"`
	Repeats   int              `json:"repeats"` // found
	DriftPPM  number           `json:"drift_ppm"`
	DriftErr  number           `json:"drift_ppm_err"`
	Warnings  []string         `json:"warnings"`
	NotStated []string         `json:"not_stated"` // why there is no drift
}

// pairDocument is what is known of a pair as a whole.
type pairDocument struct {
	Original  string   `json:"original"`
	Processed string   `json:"processed"`
	Verdict   string   `json:"verdict"`
	Reason    string   `json:"reason"` // "" for filtered
	DriftPPM  number   `json:"drift_ppm"`
	DriftErr  number   `json:"drift_ppm_err"`
	Speed     number   `json:"speed"`
	Warnings  []string `json:"warnings"`
}

// measured is what a result of a capture or a pair has beside the figures.
type measured struct {
	Absent     string  `json:"absent"` // why there are no figures, or ""
	Latency    number  `json:"latency_samples"`
	LatencyErr number  `json:"latency_samples_err"`
	Behind     *number `json:"behind_samples,omitempty"` // the first channel that has the probe
	BehindErr  *number `json:"behind_samples_err,omitempty"`
	Gain       *number `json:"gain_db,omitempty"` // of a pair as a whole
	GainErr    *number `json:"gain_db_err,omitempty"`
	Coherence  *number `json:"coherence,omitempty"`
	// Products are those of a capture's distortion.
	Products []product `json:"products,omitempty"`
}

type product struct {
	Order     int    `json:"order"`
	LeadMS    number `json:"lead_ms"`
	LevelDB   number `json:"level_db"`
	LevelErr  number `json:"level_db_err"`
	NotStated string `json:"not_stated"`
}

// Names are the two files of a capture or a pair.
type Names struct {
	From string // the probe or the original
	To   string // the capture or the processed recording
}

// Reasons why a measured result lacks what a chain's has.
const (
	noTarget = "what was measured has no target"
	oneRoad  = "it was measured in one way"
)

// CaptureJSON writes a capture's audit in the layout of a chain's.
func CaptureJSON(w io.Writer, n Names, r *capture.Report, version string) error {
	doc := document{Schema: Schema, Version: version, Results: []result{}, Capture: captureJSON(n, r)}
	for _, c := range r.Channels {
		doc.Results = append(doc.Results, capturedJSON(c))
	}
	return writeJSON(w, doc)
}

func captureJSON(n Names, r *capture.Report) *captureDocument {
	d := &captureDocument{
		File: n.To, ProbeFile: n.From, Probe: r.Probe, Repeats: r.Repeats,
		DriftPPM: number(r.Drift.PPM), DriftErr: number(r.Drift.Err), Warnings: append([]string{}, r.Warnings...), NotStated: []string{},
	}
	if r.Drift.NotStated != "" {
		d.NotStated = append(d.NotStated, r.Drift.NotStated)
	}
	return d
}

func capturedJSON(c *capture.Result) result {
	m := &measured{Absent: c.Absent, Latency: number(c.Latency), LatencyErr: number(c.LatencyErr)}
	if c.Absent != "" {
		return absentJSON(m, c.Channel, c.Rate)
	}
	out := figuresJSON(c.Figures, c.Errors)
	m.Behind, m.BehindErr = pointer(c.Behind), pointer(c.BehindErr)
	for _, p := range c.Products {
		m.Products = append(m.Products, product{p.Order, ms(p.Lead), number(p.Level), number(p.Err), p.NotStated})
	}
	out.measuredAs(m, c.Channel, c.Rate)
	out.LatencySamples, out.ResidualErr = number(c.Removed), &m.LatencyErr
	out.Warnings, out.Limits = append(out.Warnings, c.Warnings...), verdictsOf(c.Verdicts)
	for i, n := range c.Noise {
		out.Bands[i].NoiseDB, out.Bands[i].SNRDB = pointer(n.Level), pointer(n.SNR)
	}
	return out
}

// absentJSON is a channel without figures.
func absentJSON(m *measured, channel, rate int) result {
	out := figuresJSON(pair.Blank(), pair.Blank())
	out.NotStated["response"] = m.Absent
	m.Latency, m.LatencyErr = number(nan), number(nan)
	out.measuredAs(m, channel, rate)
	out.LatencySamples = number(nan)
	return out
}

// measuredAs fills in what results of captures and pairs share.
func (r *result) measuredAs(m *measured, channel, rate int) {
	r.Measured, r.Channel, r.RateHz = m, &channel, rate
	r.NotStated["target_error_db"] = noTarget
	r.NotStated["probes"] = oneRoad
}

// PairJSON writes a pair's audit in the layout of a chain's.
func PairJSON(w io.Writer, n Names, r *pair.Report, version string) error {
	doc := document{Schema: Schema, Version: version, Results: []result{}, Pair: &pairDocument{
		Original: n.From, Processed: n.To, Verdict: string(r.Verdict), Reason: r.Reason,
		DriftPPM: number(r.Drift), DriftErr: number(r.DriftErr), Speed: number(r.Speed), Warnings: append([]string{}, r.Warnings...),
	}}
	for _, c := range r.Channels {
		doc.Results = append(doc.Results, pairedJSON(r, c))
	}
	return writeJSON(w, doc)
}

func pairedJSON(r *pair.Report, c *pair.Result) result {
	m := &measured{Absent: c.Absent, Latency: number(c.Delay), LatencyErr: number(c.DelayErr)}
	if c.Absent != "" {
		return absentJSON(m, c.Channel, r.Rate)
	}
	m.Gain, m.GainErr, m.Coherence = pointer(c.Gain), pointer(c.GainErr), pointer(c.Coherence)
	out := figuresJSON(r.FiguresOf(c))
	out.measuredAs(m, c.Channel, r.Rate)
	out.LatencySamples, out.Limits = number(r.Lag), verdictsOf(c.Verdicts)
	for i, b := range c.Bands {
		out.Bands[i].Coherence = pointer(b.Coherence)
	}
	out.Curve.Coherence = scaled(c.Curve.Coherence, 1)
	return out
}

func pointer(x float64) *number {
	n := number(x)
	return &n
}
