package report

import (
	"io"
	"math"
	"slices"

	"fettle/audit/choose"
	"fettle/audit/limits"
)

// CompareSchema names the layout of a comparison in JSON; its JSON Schema is in
// package schema.
const CompareSchema = "fettle.compare/1"

type comparison struct {
	Schema  string          `json:"schema"`
	Version string          `json:"version"`
	RateHz  int             `json:"rate_hz"`
	Kernel  string          `json:"kernel"`
	Rows    []comparisonRow `json:"rows"`
	Refused []refusal       `json:"refused"`
	Advice  []advice        `json:"advice"`
}

type comparisonRow struct {
	Chain         string   `json:"chain"`
	File          string   `json:"file"`
	Realisations  []string `json:"realisations"` // the first is shown
	ApartDB       number   `json:"apart_db"`
	TimesRealTime number   `json:"times_real_time"` // measured; null: not
	Mixed         []choice `json:"mixed"`
	Results       []result `json:"results"`
	// Onsets is null without a recording.
	Onsets *onsetsDocument `json:"onsets"`
}

type choice struct {
	Stage  string `json:"stage"`
	Phase  string `json:"phase"`
	RingMS number `json:"ring_ms"`
}

type refusal struct {
	Chain       string `json:"chain"`
	File        string `json:"file"`
	Realisation string `json:"realisation"`
	Reason      string `json:"reason"`
}

type advice struct {
	For     string     `json:"for"` // a purpose, or "limits"
	Why     string     `json:"why"`
	Order   []string   `json:"order"`
	Chosen  *int       `json:"chosen"`  // index of a row; null: none keeps all limits
	Nearest *int       `json:"nearest"` // where none does
	Rows    []judgedAs `json:"rows"`    // in the order
	Words   []string   `json:"words"`
}

type judgedAs struct {
	Row      int         `json:"row"`
	Keeps    bool        `json:"keeps"`
	Verdicts [][]verdict `json:"verdicts"` // one list a result
}

// CompareJSON writes a comparison as one document.
func CompareJSON(w io.Writer, c *choose.Comparison, version string) error {
	doc := comparison{
		Schema: CompareSchema, Version: version, RateHz: c.Rate, Kernel: c.Kernel.String(),
		Rows: []comparisonRow{}, Refused: []refusal{}, Advice: []advice{},
	}
	for _, row := range c.Rows {
		doc.Rows = append(doc.Rows, comparisonRowOf(c, row))
	}
	for _, n := range c.Refused {
		doc.Refused = append(doc.Refused, refusal{n.Chain.Name, n.Chain.File, n.Name, n.Refused.Error()})
	}
	for _, a := range c.Advice {
		doc.Advice = append(doc.Advice, adviceOf(c, a))
	}
	return writeJSON(w, doc)
}

func comparisonRowOf(c *choose.Comparison, row *choose.Row) comparisonRow {
	n := row.Shown()
	out := comparisonRow{
		Chain: n.Chain.Name, File: n.Chain.File, Realisations: row.Names(), ApartDB: number(row.Apart),
		TimesRealTime: stated(n.Speed), Mixed: []choice{}, Results: []result{},
		Onsets: onsetsJSON(c.Recording, n.Onsets),
	}
	for _, n := range row.Candidates {
		for _, x := range n.Choices {
			out.Mixed = append(out.Mixed, choice{x.Stage, string(x.Phase), ms(x.Ring)})
		}
	}
	for _, r := range n.Results {
		out.Results = append(out.Results, resultOf(r))
	}
	return out
}

// stated is null for a speed of 0: not measured.
func stated(speed float64) number {
	if speed == 0 {
		return number(math.NaN())
	}
	return number(speed)
}

func adviceOf(c *choose.Comparison, a *choose.Advice) advice {
	out := advice{For: purposeKey(a), Why: a.Rule.Why, Order: a.Rule.Order, Rows: []judgedAs{}, Words: AdviceWords(c, a)}
	index := func(j *choose.Judgement) *int {
		i := slices.Index(c.Rows, j.Row)
		return &i
	}
	switch {
	case a.Chosen != nil:
		out.Chosen = index(a.Chosen)
	case len(a.Judged) > 0:
		out.Nearest = index(a.Nearest())
	}
	for _, j := range a.Judged {
		out.Rows = append(out.Rows, judgedAs{*index(&j), j.Keeps, eachVerdicts(j.Verdicts)})
	}
	return out
}

func eachVerdicts(paths [][]limits.Verdict) [][]verdict {
	var out [][]verdict
	for _, v := range paths {
		out = append(out, verdictsOf(v))
	}
	return out
}
