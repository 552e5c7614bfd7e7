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
	// Capture and Pair are null unless the audit is of one.
	Capture *captureDocument `json:"capture"`
	Pair    *pairDocument    `json:"pair"`
}

// Heard is a recording that was put through the chain, and what became of its
// onsets.
type Heard struct {
	Recording string
	Onsets    *onsets.Report
}

// A key with _err is the half width of the 95 % interval of the figure before it. Only
// what was measured has any; null: not stated.
type result struct {
	Chain           *string `json:"chain"` // null: no chain
	Phase           *string `json:"phase"`
	RateHz          int     `json:"rate_hz"`
	Channel         *int    `json:"channel"` // null: all that no stage names
	Stage           *string `json:"stage"`   // null: the whole chain
	LatencySamples  number  `json:"latency_samples"`
	ResidualSamples number  `json:"residual_samples"`
	ResidualErr     *number `json:"residual_samples_err,omitempty"`
	*built
	Measured          *measured         `json:"measured,omitempty"` // of a capture or a pair
	Notes             []string          `json:"notes"`
	Warnings          []string          `json:"warnings"`
	LeadMS            number            `json:"lead_ms"`
	LeadErr           *number           `json:"lead_ms_err,omitempty"`
	Polarity          *int              `json:"polarity"`
	DelaySpreadMS     number            `json:"delay_spread_ms"`
	DelaySpreadErr    *number           `json:"delay_spread_ms_err,omitempty"`
	PhaseDeviationDeg number            `json:"phase_deviation_deg"`
	PhaseDeviationErr *number           `json:"phase_deviation_deg_err,omitempty"`
	SumTestDB         number            `json:"sum_test_db"`
	SumTestErr        *number           `json:"sum_test_db_err,omitempty"`
	TargetErrorDB     number            `json:"target_error_db"`
	Smear             smear             `json:"smear"`
	PreRing           ring              `json:"pre_ring"`
	PostRing          ring              `json:"post_ring"`
	Bands             []band            `json:"bands"`
	Curve             curve             `json:"curve"`
	Probes            probes            `json:"probes"`
	ThroughFile       []throughFile     `json:"through_file,omitempty"`
	Limits            []verdict         `json:"limits"`
	NotStated         map[string]string `json:"not_stated"`
}

// built is what a chain's result has beside the figures.
type built struct {
	DelaySamples     int     `json:"delay_samples"` // by the chain's delay stages, kept
	LookAheadSamples int     `json:"look_ahead_samples"`
	Taps             int     `json:"taps"`
	Sections         int     `json:"sections"`
	ZeroSections     int     `json:"zero_sections"` // run forward and backward
	Operations       number  `json:"operations"`    // multiplications a sample, about
	Character        *string `json:"character"`
	ToleranceDB      number  `json:"tolerance_db"`
}

type smear struct {
	Pink    shares  `json:"pink"`
	White   shares  `json:"white"`
	D90MS   number  `json:"d90_ms"`
	D90Err  *number `json:"d90_ms_err,omitempty"`
	D999MS  number  `json:"d999_ms"`
	D999Err *number `json:"d999_ms_err,omitempty"`
}

type shares struct {
	TotalMS      number  `json:"total_ms"`
	TotalErr     *number `json:"total_ms_err,omitempty"`
	MagnitudeMS  number  `json:"magnitude_ms"`
	MagnitudeErr *number `json:"magnitude_ms_err,omitempty"`
	PhaseMS      number  `json:"phase_ms"`
	PhaseErr     *number `json:"phase_ms_err,omitempty"`
}

type ring struct {
	WhiteDB         number            `json:"white_db"`
	WhiteErr        *number           `json:"white_db_err,omitempty"`
	PinkDB          number            `json:"pink_db"`
	PinkErr         *number           `json:"pink_db_err,omitempty"`
	WhiteMS         number            `json:"white_ms"`
	WhiteMSErr      *number           `json:"white_ms_err,omitempty"`
	PinkMS          number            `json:"pink_ms"`
	PinkMSErr       *number           `json:"pink_ms_err,omitempty"`
	BeyondDB        map[string]number `json:"beyond_db"` // white
	BeyondErr       map[string]number `json:"beyond_db_err,omitempty"`
	PinkBeyondDB    map[string]number `json:"pink_beyond_db"`
	PinkBeyondDBErr map[string]number `json:"pink_beyond_db_err,omitempty"`
}

type band struct {
	CentreHz          number  `json:"centre_hz"`
	Nominal           number  `json:"nominal"`
	Carried           bool    `json:"carried"`
	GainDB            number  `json:"gain_db"`
	GainErr           *number `json:"gain_db_err,omitempty"`
	ArrivalMS         number  `json:"arrival_ms"`
	ArrivalErr        *number `json:"arrival_ms_err,omitempty"`
	SpreadMS          number  `json:"spread_ms"`
	SpreadErr         *number `json:"spread_ms_err,omitempty"`
	PreRingMS         number  `json:"pre_ring_ms"`
	PreRingErr        *number `json:"pre_ring_ms_err,omitempty"`
	PostRingMS        number  `json:"post_ring_ms"`
	PostRingErr       *number `json:"post_ring_ms_err,omitempty"`
	PhaseDeviationDeg number  `json:"phase_deviation_deg"`
	PhaseDeviationErr *number `json:"phase_deviation_deg_err,omitempty"`
	NoiseDB           *number `json:"noise_db,omitempty"` // of a capture, as captured, re full scale
	SNRDB             *number `json:"snr_db,omitempty"`   // of a capture's response
	Coherence         *number `json:"coherence,omitempty"`
}

type curve struct {
	Hz            []number `json:"hz"`
	MagnitudeDB   []number `json:"magnitude_db"`
	MagnitudeErr  []number `json:"magnitude_db_err,omitzero"`
	PhaseDeg      []number `json:"phase_deg"`
	PhaseErr      []number `json:"phase_deg_err,omitzero"`
	GroupDelayMS  []number `json:"group_delay_ms"`
	GroupDelayErr []number `json:"group_delay_ms_err,omitzero"`
	Coherence     []number `json:"coherence,omitempty"`
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
	return writeJSON(w, doc)
}

func writeJSON(w io.Writer, doc any) error {
	enc := json.NewEncoder(w)
	enc.SetIndent("", " ")
	return enc.Encode(doc)
}

func resultOf(r *audit.Result) result {
	out := figuresJSON(r.Figures, nil)
	phase := string(r.Phase)
	out.Chain, out.Phase, out.RateHz = &r.Chain, &phase, r.Rate
	out.LatencySamples, out.ResidualSamples = number(r.Latency.Removed), number(r.Latency.Residual)
	out.built = &built{
		DelaySamples: r.Delay, LookAheadSamples: r.Latency.LookAhead,
		Taps: r.Taps, Sections: r.Sections, ZeroSections: r.ZeroSections,
		Operations: number(r.Operations), ToleranceDB: number(r.ToleranceDB),
	}
	out.Notes, out.Warnings = append(out.Notes, r.Notes...), append(out.Warnings, r.Warnings...)
	out.TargetErrorDB = number(r.TargetErrorDB)
	out.Probes = probes{number(r.Disagreement * toUS), number(r.AnalyticDisagreement * toUS)}
	out.Limits = verdictsOf(r.Verdicts)
	for _, t := range r.ThroughFile {
		out.ThroughFile = append(out.ThroughFile, throughFileJSON(t))
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
	return out
}

// figuresJSON is what all results have. errs are the half widths of the intervals, nil
// for figures that are exact.
func figuresJSON(f, errs *figures.Figures) result {
	nan := number(math.NaN())
	e := half{errs}
	out := result{
		ResidualSamples: number(f.Latency), ResidualErr: e.of(1, func(e *figures.Figures) float64 { return e.Latency }),
		Notes: []string{}, Warnings: []string{},
		LeadMS: ms(f.Lead), LeadErr: e.of(toMS, func(e *figures.Figures) float64 { return e.Lead }),
		DelaySpreadMS: ms(f.DelaySpread), DelaySpreadErr: e.of(toMS, func(e *figures.Figures) float64 { return e.DelaySpread }),
		PhaseDeviationDeg: number(f.PhaseDeviation), PhaseDeviationErr: e.of(1, func(e *figures.Figures) float64 { return e.PhaseDeviation }),
		SumTestDB: number(f.SumTest), SumTestErr: e.of(1, func(e *figures.Figures) float64 { return e.SumTest }),
		TargetErrorDB: nan,
		Smear: smear{
			Pink:  sharesOf(f.Pink, e, func(e *figures.Figures) figures.Smear { return e.Pink }),
			White: sharesOf(f.White, e, func(e *figures.Figures) figures.Smear { return e.White }),
			D90MS: ms(f.D90), D90Err: e.of(toMS, func(e *figures.Figures) float64 { return e.D90 }),
			D999MS: ms(f.D999), D999Err: e.of(toMS, func(e *figures.Figures) float64 { return e.D999 }),
		},
		PreRing:  ringJSON(f.PreRing, e, func(e *figures.Figures) figures.Ring { return e.PreRing }),
		PostRing: ringJSON(f.PostRing, e, func(e *figures.Figures) figures.Ring { return e.PostRing }),
		Bands:    []band{}, Curve: curveOf(f.Curve, errs),
		Probes: probes{nan, nan}, Limits: []verdict{}, NotStated: map[string]string{},
	}
	for figure, reason := range f.NotStated {
		out.NotStated[keyOf(figure)] = reason
	}
	if f.Polarity != 0 {
		out.Polarity = &f.Polarity
	}
	for i, b := range f.Bands {
		of := func(scale float64, get func(b figures.BandFigures) float64) *number {
			return e.of(scale, func(e *figures.Figures) float64 { return get(e.Bands[i]) })
		}
		out.Bands = append(out.Bands, band{
			CentreHz: number(b.Centre), Nominal: number(b.Nominal), Carried: b.Carried,
			GainDB: number(b.Gain), GainErr: of(1, func(b figures.BandFigures) float64 { return b.Gain }),
			ArrivalMS: ms(b.Arrival), ArrivalErr: of(toMS, func(b figures.BandFigures) float64 { return b.Arrival }),
			SpreadMS: ms(b.Spread), SpreadErr: of(toMS, func(b figures.BandFigures) float64 { return b.Spread }),
			PreRingMS: ms(b.PreRing), PreRingErr: of(toMS, func(b figures.BandFigures) float64 { return b.PreRing }),
			PostRingMS: ms(b.PostRing), PostRingErr: of(toMS, func(b figures.BandFigures) float64 { return b.PostRing }),
			PhaseDeviationDeg: number(b.PhaseDeviation), PhaseDeviationErr: of(1, func(b figures.BandFigures) float64 { return b.PhaseDeviation }),
		})
	}
	return out
}

// half gives half widths of intervals, nil for figures that are exact.
type half struct{ errs *figures.Figures }

func (h half) of(scale float64, get func(*figures.Figures) float64) *number {
	if h.errs == nil {
		return nil
	}
	n := number(scale * get(h.errs))
	return &n
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

func sharesOf(s figures.Smear, e half, get func(*figures.Figures) figures.Smear) shares {
	return shares{
		ms(s.Total), e.of(toMS, func(e *figures.Figures) float64 { return get(e).Total }),
		ms(s.Magnitude), e.of(toMS, func(e *figures.Figures) float64 { return get(e).Magnitude }),
		ms(s.Phase), e.of(toMS, func(e *figures.Figures) float64 { return get(e).Phase }),
	}
}

func ringJSON(r figures.Ring, e half, get func(*figures.Figures) figures.Ring) ring {
	out := ring{
		number(r.White.Level), e.of(1, func(e *figures.Figures) float64 { return get(e).White.Level }),
		number(r.Pink.Level), e.of(1, func(e *figures.Figures) float64 { return get(e).Pink.Level }),
		ms(r.White.Length), e.of(toMS, func(e *figures.Figures) float64 { return get(e).White.Length }),
		ms(r.Pink.Length), e.of(toMS, func(e *figures.Figures) float64 { return get(e).Pink.Length }),
		beyond(r.White), nil, beyond(r.Pink), nil,
	}
	if e.errs != nil {
		out.BeyondErr, out.PinkBeyondDBErr = beyond(get(e.errs).White), beyond(get(e.errs).Pink)
	}
	return out
}

func beyond(c figures.RingColumn) map[string]number {
	out := map[string]number{}
	for i, t := range figures.BeyondTimes {
		out[fmt.Sprintf("%g", t*toMS)] = number(c.Beyond[i])
	}
	return out
}

func curveOf(c figures.Curve, errs *figures.Figures) curve {
	out := curve{Hz: scaled(c.Hz, 1), MagnitudeDB: scaled(c.Magnitude, 1), PhaseDeg: scaled(c.Phase, 1), GroupDelayMS: scaled(c.GroupDelay, toMS)}
	if errs != nil {
		e := errs.Curve
		out.MagnitudeErr, out.PhaseErr, out.GroupDelayErr = scaled(e.Magnitude, 1), scaled(e.Phase, 1), scaled(e.GroupDelay, toMS)
	}
	return out
}

func scaled(x []float64, by float64) []number {
	out := make([]number, len(x))
	for i, v := range x {
		out[i] = number(by * v)
	}
	return out
}
