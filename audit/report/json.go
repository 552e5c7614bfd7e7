package report

import (
	"encoding/json"
	"fmt"
	"io"
	"math"
	"strconv"

	"fettle/audit"
	"fettle/audit/figures"
	"fettle/audit/onsets"
)

// Schema names the layout of the JSON report.
const Schema = "fettle.audit/1"

// document is the JSON contract.
type document struct {
	Schema  string   `json:"schema"`
	Version string   `json:"version"`
	Results []result `json:"results"`
	// Onsets is null unless a recording was named.
	Onsets *onsetsDocument `json:"onsets"`
}

// Heard is a recording that was put through the chain, and what became of its
// onsets.
type Heard struct {
	Recording string
	Onsets    *onsets.Report
}

type result struct {
	Chain             string            `json:"chain"`
	Phase             string            `json:"phase"`
	RateHz            int               `json:"rate_hz"`
	Channel           *int              `json:"channel"` // null: all that no stage names
	Stage             *string           `json:"stage"`   // null: the whole chain
	LatencySamples    number            `json:"latency_samples"`
	ResidualSamples   number            `json:"residual_samples"`
	DelaySamples      int               `json:"delay_samples"` // by the chain's delay stages, kept
	LookAheadSamples  int               `json:"look_ahead_samples"`
	Taps              int               `json:"taps"`
	Sections          int               `json:"sections"`
	ZeroSections      int               `json:"zero_sections"` // run forward and backward
	Operations        number            `json:"operations"`    // multiplications a sample, about
	Character         *string           `json:"character"`
	Notes             []string          `json:"notes"`
	Warnings          []string          `json:"warnings"`
	LeadMS            number            `json:"lead_ms"`
	Polarity          *int              `json:"polarity"`
	DelaySpreadMS     number            `json:"delay_spread_ms"`
	PhaseDeviationDeg number            `json:"phase_deviation_deg"`
	SumTestDB         number            `json:"sum_test_db"`
	TargetErrorDB     number            `json:"target_error_db"`
	ToleranceDB       number            `json:"tolerance_db"`
	Smear             smear             `json:"smear"`
	PreRing           ring              `json:"pre_ring"`
	PostRing          ring              `json:"post_ring"`
	Bands             []band            `json:"bands"`
	Curve             curve             `json:"curve"`
	Probes            probes            `json:"probes"`
	Limits            []verdict         `json:"limits"`
	NotStated         map[string]string `json:"not_stated"`
}

type smear struct {
	Pink   shares `json:"pink"`
	White  shares `json:"white"`
	D90MS  number `json:"d90_ms"`
	D999MS number `json:"d999_ms"`
}

type shares struct {
	TotalMS     number `json:"total_ms"`
	MagnitudeMS number `json:"magnitude_ms"`
	PhaseMS     number `json:"phase_ms"`
}

type ring struct {
	WhiteDB      number            `json:"white_db"`
	PinkDB       number            `json:"pink_db"`
	WhiteMS      number            `json:"white_ms"`
	PinkMS       number            `json:"pink_ms"`
	BeyondDB     map[string]number `json:"beyond_db"` // white
	PinkBeyondDB map[string]number `json:"pink_beyond_db"`
}

type band struct {
	CentreHz          number `json:"centre_hz"`
	Nominal           number `json:"nominal"`
	Carried           bool   `json:"carried"`
	GainDB            number `json:"gain_db"`
	ArrivalMS         number `json:"arrival_ms"`
	SpreadMS          number `json:"spread_ms"`
	PreRingMS         number `json:"pre_ring_ms"`
	PostRingMS        number `json:"post_ring_ms"`
	PhaseDeviationDeg number `json:"phase_deviation_deg"`
}

type curve struct {
	Hz           []number `json:"hz"`
	MagnitudeDB  []number `json:"magnitude_db"`
	PhaseDeg     []number `json:"phase_deg"`
	GroupDelayMS []number `json:"group_delay_ms"`
}

type probes struct {
	DisagreementUS         number `json:"disagreement_us"`
	AnalyticDisagreementUS number `json:"analytic_disagreement_us"`
}

// number is a float64 whose NaN, 'not stated', is null.
type number float64

func (n number) MarshalJSON() ([]byte, error) {
	if math.IsNaN(float64(n)) || math.IsInf(float64(n), 0) {
		return []byte("null"), nil
	}
	return strconv.AppendFloat(nil, float64(n), 'g', -1, 64), nil
}

const (
	toMS = 1e3
	toUS = 1e6
)

func ms(seconds float64) number { return number(seconds * toMS) }

// JSON writes audit results as one document.
func JSON(w io.Writer, results []*audit.Result, version string) error {
	return JSONHeard(w, results, Heard{}, version)
}

// JSONHeard is JSON with what was found on a recording.
func JSONHeard(w io.Writer, results []*audit.Result, heard Heard, version string) error {
	doc := document{Schema: Schema, Version: version, Results: []result{}, Onsets: onsetsJSON(heard.Recording, heard.Onsets)}
	for _, r := range results {
		doc.Results = append(doc.Results, resultOf(r))
	}
	enc := json.NewEncoder(w)
	enc.SetIndent("", " ")
	return enc.Encode(doc)
}

func resultOf(r *audit.Result) result {
	f := r.Figures
	out := result{
		Chain: r.Chain, Phase: string(r.Phase), RateHz: r.Rate,
		LatencySamples: number(r.Latency.Removed), ResidualSamples: number(r.Latency.Residual),
		DelaySamples: r.Delay, LookAheadSamples: r.Latency.LookAhead,
		Taps: r.Taps, Sections: r.Sections, ZeroSections: r.ZeroSections,
		Operations: number(r.Operations), Notes: append([]string{}, r.Notes...), Warnings: append([]string{}, r.Warnings...),
		LeadMS: ms(f.Lead), DelaySpreadMS: ms(f.DelaySpread),
		PhaseDeviationDeg: number(f.PhaseDeviation), SumTestDB: number(f.SumTest),
		TargetErrorDB: number(r.TargetErrorDB), ToleranceDB: number(r.ToleranceDB),
		Smear:   smear{sharesOf(f.Pink), sharesOf(f.White), ms(f.D90), ms(f.D999)},
		PreRing: ringOf(f.PreRing), PostRing: ringOf(f.PostRing),
		Bands: []band{}, Curve: curveOf(f.Curve),
		Probes:    probes{number(r.Disagreement * toUS), number(r.AnalyticDisagreement * toUS)},
		Limits:    verdictsOf(r.Verdicts),
		NotStated: map[string]string{},
	}
	for figure, reason := range f.NotStated {
		out.NotStated[keyOf(figure)] = reason
	}
	if r.Character != "" {
		out.Character = &r.Character
	}
	if r.Stage != "" {
		out.Stage = &r.Stage
	}
	if r.Channel > 0 {
		out.Channel = &r.Channel
	}
	if f.Polarity != 0 {
		out.Polarity = &f.Polarity
	}
	for _, b := range f.Bands {
		out.Bands = append(out.Bands, band{
			number(b.Centre), number(b.Nominal), b.Carried, number(b.Gain), ms(b.Arrival), ms(b.Spread),
			ms(b.PreRing), ms(b.PostRing), number(b.PhaseDeviation),
		})
	}
	return out
}

// keyOf is the key under which a figure stands in the report.
func keyOf(figure string) string {
	switch figure {
	case "delay_spread":
		return "delay_spread_ms"
	case "phase_deviation":
		return "phase_deviation_deg"
	case "sum_test":
		return "sum_test_db"
	}
	return figure
}

func sharesOf(s figures.Smear) shares { return shares{ms(s.Total), ms(s.Magnitude), ms(s.Phase)} }

func ringOf(r figures.Ring) ring {
	return ring{
		number(r.White.Level), number(r.Pink.Level), ms(r.White.Length), ms(r.Pink.Length),
		beyond(r.White), beyond(r.Pink),
	}
}

func beyond(c figures.RingColumn) map[string]number {
	out := map[string]number{}
	for i, t := range figures.BeyondTimes {
		out[fmt.Sprintf("%g", t*toMS)] = number(c.Beyond[i])
	}
	return out
}

func curveOf(c figures.Curve) curve {
	var out curve
	for i, hz := range c.Hz {
		out.Hz = append(out.Hz, number(hz))
		out.MagnitudeDB = append(out.MagnitudeDB, number(c.Magnitude[i]))
		out.PhaseDeg = append(out.PhaseDeg, number(c.Phase[i]))
		out.GroupDelayMS = append(out.GroupDelayMS, ms(c.GroupDelay[i]))
	}
	return out
}
