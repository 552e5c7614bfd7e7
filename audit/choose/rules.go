package choose

import (
	"fmt"
	"slices"
	"strings"

	"fettle/audit/limits"
	"fettle/filter"
)

// Purpose is what the output is for.
type Purpose string

// The purposes; Own, the zero value, asks for nothing but the user's limits.
const (
	Own       Purpose = ""
	Mix       Purpose = "mix"
	Master    Purpose = "master"
	Alignment Purpose = "alignment"
	Live      Purpose = "live"
	Listening Purpose = "listening"
)

// Rule is what a purpose asks for.
type Rule struct {
	Purpose Purpose
	Meaning string   // what is done with the output
	Limits  []string // as on a command line
	Order   []string // in which candidates are tried
	Why     string   // in a sentence
}

// The orders in which candidates are tried.
var (
	ringAheadLast = []string{"iir", "minimum", AsMixed, "given", AsWritten, "linear", "zero"}
	phaseFirst    = []string{"linear", AsMixed, "minimum", "iir", "given", AsWritten, "zero"}
)

var rules = []Rule{
	{Mix, "mixed with untreated tracks of the same sound", []string{"sum-test=-0.5 dB"}, ringAheadLast,
		"bands that come late cancel against the untreated track; what rings ahead is taken only where nothing else keeps the sum"},
	{Master, "heard by itself, transients closely", []string{"audibility", "pre-ring=-60 dB beyond 5 ms"}, phaseFirst,
		"phase is kept wherever that does not ring ahead for longer than pre-masking may cover"},
	{Alignment, "aligned by a program to transcripts or other tracks", []string{"delay-spread=1 ms"}, ringAheadLast,
		"a boundary must be found at one time in every band"},
	{Live, "heard while it sounds", []string{"latency=5 ms"}, ringAheadLast,
		"what must look ahead comes late"},
	{Listening, "heard by itself, as programme", []string{"audibility", "pre-ring=-60 dB beyond 20 ms"}, ringAheadLast,
		"delays must stay under the published thresholds, and nothing may ring ahead for longer than any published pre-masking time"},
}

var own = Rule{Own, "what the limits ask for", nil, phaseFirst, "phase kept first"}

// Rules lists what the purposes ask for.
func Rules() []Rule { return slices.Clone(rules) }

// ParsePurpose reads a purpose.
func ParsePurpose(name string) (Purpose, error) {
	var names []string
	for _, r := range rules {
		if string(r.Purpose) == name {
			return r.Purpose, nil
		}
		names = append(names, string(r.Purpose))
	}
	return Own, fmt.Errorf("%q is no purpose; allowed are %s", name, strings.Join(names, ", "))
}

func ruleOf(p Purpose) Rule {
	for _, r := range rules {
		if r.Purpose == p {
			return r
		}
	}
	return own
}

// MagnitudeLimit in dB is how far any candidate may stray from the chain's
// magnitude.
const MagnitudeLimit = 0.5

// limitsFor are the rule's limits, then the user's, which go before a rule's on
// the same measure.
func (r Rule) limitsFor(c *filter.Chain, users []limits.Limit) ([]limits.Limit, error) {
	texts := append([]string{fmt.Sprintf("target-error=%g dB", max(MagnitudeLimit, c.Tolerance))}, r.Limits...)
	texts = slices.DeleteFunc(texts, func(text string) bool {
		measure, _, bounded := strings.Cut(text, "=")
		return slices.ContainsFunc(users, func(u limits.Limit) bool {
			return u.Name == text || bounded && strings.HasPrefix(u.Name, measure+" ")
		})
	})
	all, err := limits.Parse(texts...)
	return append(all, users...), err
}
