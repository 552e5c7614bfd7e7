package filter

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"fettle/filter/design"
	"fettle/filter/response"

	"github.com/goccy/go-yaml/ast"
)

// Realisation names a way to build a chain's magnitude response.
type Realisation string

// The realisations; Written, the zero value, keeps what the chain file says.
const (
	Written Realisation = ""
	Linear  Realisation = "linear"
	Minimum Realisation = "minimum"
	IIR     Realisation = "iir"
	Zero    Realisation = "zero"
	Given   Realisation = "given"
)

var realisations = []string{string(Linear), string(Minimum), string(IIR), string(Zero), string(Given)}

// ParseRealisation reads a realisation's name.
func ParseRealisation(name string) (Realisation, error) {
	if !slices.Contains(realisations, name) {
		return "", fmt.Errorf("phase %q is not known; allowed are %s", name, strings.Join(realisations, ", "))
	}
	return Realisation(name), nil
}

// Stage is one step of a chain as its file has it.
type Stage struct {
	Kind     string
	Text     string      // as it stands in the file, on one line
	Phase    Realisation // as written at the stage, Written if it is not
	Channels []int       // from 1; empty: all
	When     *Condition  // nil: always

	kind kind
	at   place
	plan func(rate float64) (plan, error)
}

// place is where a stage stands in its file.
type place struct{ line, column int }

// kind is what the realiser must know of a stage's kind.
type kind struct {
	read func(f *fields, c *Chain) func(rate float64) (plan, error)
	// coefficients: given by coefficients, so the chain's phase does not
	// speak for it.
	coefficients bool
	// intent: its phase is wanted; every realisation keeps it.
	intent bool
	// tone: shapes what is carried instead of bounding it (gain, bell,
	// shelf), so it does not decide which bands count as carried.
	tone bool
}

// plan is a stage at one rate. At most one of sections, taps and mask is set.
type plan struct {
	gain     float64                              // linear factor
	delay    float64                              // samples
	sections []response.Section                   // recursive form; the curve of a classical stage
	taps     []float64                            // given kernel
	mask     *design.Mask                         // bounds to be met
	kernel   func(design.Mask) ([]float64, error) // the method for a mask
	cusps    []*cusp                              // one a section where the curve's target is one-sided, nil: nowhere
	notes    []string                             // what the user should know of this stage at this rate
	warnings []string                             // what was asked for and is left out at this rate
	// half designs what is run forward and backward under zero: sections
	// whose |H|^2 comes near to the stage's magnitude. Nil: there are none.
	half func() ([]response.Section, error)
}

// kinds is every stage that a chain can hold.
var kinds map[string]kind

func init() { // breaks the cycle between the table and the readers that list it
	kinds = map[string]kind{
		"highpass":  {read: passReader(design.Highpass)},
		"lowpass":   {read: passReader(design.Lowpass)},
		"bandpass":  {read: passReader(design.Bandpass)},
		"bandstop":  {read: passReader(design.Bandstop)},
		"bell":      {read: readBell, tone: true},
		"lowshelf":  {read: shelfReader(design.LowShelf, design.LowShelfSlope, design.MatchedLowShelf), tone: true},
		"highshelf": {read: shelfReader(design.HighShelf, design.HighShelfSlope, design.MatchedHighShelf), tone: true},
		"notch":     {read: readNotch},
		"allpass":   {read: readAllpass, intent: true},
		"gain":      {read: readGain, tone: true, intent: true},
		"delay":     {read: readDelay, intent: true},
		"dc":        {read: readDC},
		"hum":       {read: readHum},
		"replay":    {read: readReplay, tone: true},
		"fir":       {read: readFIR, coefficients: true},
		"biquads":   {read: readBiquads, coefficients: true},
	}
}

func kindNames() string {
	names := make([]string, 0, len(kinds))
	for name := range kinds {
		names = append(names, name)
	}
	slices.Sort(names)
	return strings.Join(names, ", ")
}

// readStage reads one item of the list of stages.
func (c *Chain) readStage(d *decoder, n ast.Node) *Stage {
	item := d.mapping(n, "a stage", n)
	if d.err != nil {
		return nil
	}
	if len(item.order) != 1 {
		d.fail(n, "a stage is one name with its values, such as highpass: {at: 70 Hz, order: 4}; here are %d names", len(item.order))
		return nil
	}
	name := item.order[0]
	entry := item.keys[name]
	k, ok := kinds[name]
	if !ok {
		d.fail(entry.Key, "there is no stage %s; stages are %s", quote(name), kindNames())
		return nil
	}
	d.highest = 0
	f := d.mapping(entry.Value, "stage "+name, entry.Key)
	s := &Stage{Kind: name, Text: oneLine(entry), kind: k}
	s.at.line, s.at.column = position(entry.Key)
	build := k.read(f, c)
	s.readCommon(f)
	f.done()
	s.plan = planner(build, d.highest)
	if d.err == nil {
		if _, err := build(ampleFor(d.highest)); err != nil {
			d.fail(entry.Key, "stage %s: %s", name, strings.TrimPrefix(err.Error(), name+": "))
		}
	}
	return s
}

// ampleRate suits what names no frequency.
const ampleRate = 4 * maxHz

// ampleFor is a rate that holds the highest frequency of a stage with room to
// spare, and not so much that its designs would lose digits: what cannot be
// designed at this rate cannot be at any.
func ampleFor(highest float64) float64 {
	if highest == 0 {
		return ampleRate
	}
	return 16 * highest
}

// planner makes a stage's design refuse rates that do not suit it: highest is
// the highest frequency that the stage names.
func planner(build func(rate float64) (plan, error), highest float64) func(rate float64) (plan, error) {
	return func(rate float64) (plan, error) {
		if !(highest < rate/2) {
			return plan{}, fmt.Errorf("%g Hz is not below half the rate of %g Hz, %g Hz; lower it, add when: rate > %g Hz to do without the stage there, or leave such recordings out",
				highest, rate, rate/2, 2*highest)
		}
		p, err := build(rate)
		if err == nil {
			err = checkRing(p.sections)
		}
		return p, err
	}
}

// longestRing is how many samples a recursive stage may take to fall to 1e-15:
// its response is found whole, and transforms of eight times as many points
// must be possible.
const longestRing = design.MaxTaps

// checkRing refuses poles so near the unit circle that the response can't be
// told from one that never ends, or beyond it.
func checkRing(sections []response.Section) error {
	if !response.Stable(sections) || !(math.Log(response.MaxPoleRadius(sections)) < math.Log(1e-15)/longestRing) {
		return fmt.Errorf("it would ring for more than %d samples; raise its frequency or width", longestRing)
	}
	return nil
}

// readCommon reads what may stand on any stage.
func (s *Stage) readCommon(f *fields) {
	s.Phase = Realisation(f.word("phase", "", realisations...))
	if n, ok := f.get("when"); ok {
		s.When = f.d.condition(n)
	}
	if n, ok := f.get("channels"); ok {
		s.Channels = f.d.channels(n)
	}
}

// channels reads a list of different channels, from 1.
func (d *decoder) channels(n ast.Node) []int {
	var out []int
	for _, v := range d.list(n, "channels", "[1, 2]") {
		channel := d.whole(v, "channels", 1, math.MaxUint16)
		if slices.Contains(out, channel) {
			d.fail(v, "'channels' names channel %d twice; keep one", channel)
		}
		out = append(out, channel)
	}
	if len(out) == 0 {
		d.fail(n, "'channels' is an empty list; name channels from 1, or leave it out for all")
	}
	return out
}

// serves tells whether the stage applies to a channel (from 1; 0 stands for
// all channels that no stage names).
func (s *Stage) serves(channel int) bool {
	return len(s.Channels) == 0 || slices.Contains(s.Channels, channel)
}

// phaseUnder is how the stage is realised when the chain says chain and the
// caller asks for as.
func (s *Stage) phaseUnder(chain, as Realisation) Realisation {
	switch {
	case s.Phase == Given:
		return Given
	case as != Written:
		return as
	case s.Phase != Written:
		return s.Phase
	case s.kind.coefficients || chain == Written:
		return Given
	}
	return chain
}

// Condition is a stage's when: a comparison with the recording's rate.
type Condition struct {
	op   string
	rate float64
}

var comparisons = []string{">=", "<=", "==", "!=", ">", "<"}

func (d *decoder) condition(n ast.Node) *Condition {
	text := d.text(n, "when")
	rest, ok := strings.CutPrefix(strings.TrimSpace(text), "rate")
	rest = strings.TrimSpace(rest)
	for _, op := range comparisons {
		value, found := strings.CutPrefix(rest, op)
		if !ok || !found {
			continue
		}
		hz, err := frequency.parse(strings.TrimSpace(value))
		if err == nil {
			err = checkHz(hz)
		}
		if err != nil {
			d.fail(n, "'when' is %s: %v", describe(n), err)
		}
		return &Condition{op, hz}
	}
	d.fail(n, "'when' is %s; write a comparison with the recording's rate, such as rate >= 32 kHz", describe(n))
	return nil
}

// Holds tells whether the condition is true at a rate; nil always holds.
func (c *Condition) Holds(rate float64) bool {
	if c == nil {
		return true
	}
	switch c.op {
	case ">=":
		return rate >= c.rate
	case "<=":
		return rate <= c.rate
	case "==":
		return rate == c.rate
	case "!=":
		return rate != c.rate
	case ">":
		return rate > c.rate
	}
	return rate < c.rate
}

// oneLine is a stage's text without its remarks, blanks and line ends made single
// blanks.
func oneLine(n ast.Node) string {
	var words []string
	for line := range strings.Lines(n.String()) {
		for _, word := range strings.Fields(line) {
			if strings.HasPrefix(word, "#") {
				break
			}
			words = append(words, word)
		}
	}
	return strings.Join(words, " ")
}
