package choose

import (
	"cmp"
	"fmt"
	"math"
	"math/cmplx"
	"slices"

	"fettle/audit"
	"fettle/audit/onsets"
	"fettle/filter"
	"fettle/filter/response"
)

// Names of candidates that are no realisation of filter's own.
const (
	AsWritten = "written"
	AsMixed   = "mixed"
)

// Usual are the candidates of a comparison unless it is asked for others.
var Usual = []string{AsWritten, string(filter.Linear), AsMixed, string(filter.Minimum), string(filter.IIR), string(filter.Zero)}

// ParseName reads a candidate's name.
func ParseName(name string) (string, error) {
	if name == AsWritten || name == AsMixed {
		return name, nil
	}
	if _, err := filter.ParseRealisation(name); err != nil {
		return "", fmt.Errorf("%q is no realisation to compare; allowed are linear, minimum, iir, zero, given, %s, %s", name, AsWritten, AsMixed)
	}
	return name, nil
}

// Candidate is one way to realise one chain.
type Candidate struct {
	Chain   Chain    // of mixed: with the phases in it
	Name    string   // of the realisation
	Choices []Choice // of mixed
	Filter  *filter.Filter
	// Refused is why the chain has no such realisation; Filter is nil then.
	Refused error
	// Results are the audit of the candidate that its row shows, one a path.
	Results []*audit.Result
	// Onsets are what becomes of those of the recording; nil: none is named, or the
	// candidate is not the one that its row shows.
	Onsets *onsets.Report
	// Speed is how many seconds of sound one goroutine filtered in one second,
	// as measured on this machine; 0: not measured.
	Speed float64
}

// newCandidate realises a chain, or notes why it cannot.
func newCandidate(c Chain, name string, rate int) *Candidate {
	n := &Candidate{Chain: c, Name: name}
	as := filter.Written
	switch name {
	case AsWritten:
	case AsMixed:
		if n.Chain, n.Choices, n.Refused = Mixed(c, rate); n.Refused != nil {
			n.Chain = c
			return n
		}
	default:
		as = filter.Realisation(name)
	}
	n.Filter, n.Refused = n.Chain.Realise(rate, as)
	return n
}

// operations is what a sample costs, over all paths.
func (c *Candidate) operations() float64 {
	var sum float64
	for _, p := range c.Filter.Paths() {
		sum += p.Operations()
	}
	return sum
}

// agreeFloor is how far under the greatest magnitude, as a factor, a difference
// is no longer held against the magnitude at its own frequency: as far as a band
// counts as carried. Beside a zero, where targets are one-sided, realisations
// differ by much of what little is left.
const agreeFloor = 0.1

// Agrees tells whether two candidates' aligned outputs agree within tolerance:
// at every frequency |Ha - Hb| <= (10^(2 t/20) - 1) max(|Ha|, 0.1 max |Ha|), t
// being the larger tolerance in dB. Each may stray from their target by t. apart
// is the largest difference found, in dB in that sense; +Inf when they treat
// channels differently.
func (c *Candidate) Agrees(other *Candidate) (apart float64, ok bool) {
	if c.Filter == other.Filter {
		return 0, true
	}
	tolerance := 2 * max(c.Chain.Tolerance, other.Chain.Tolerance)
	p, q := c.Filter.Paths(), other.Filter.Paths()
	if len(p) != len(q) {
		return math.Inf(1), false
	}
	for i := range p {
		if p[i].Channel != q[i].Channel || p[i].Delay != q[i].Delay {
			return math.Inf(1), false
		}
		shift := c.Filter.Shift(p[i]) - other.Filter.Shift(q[i])
		apart = max(apart, difference(p[i], q[i], shift, float64(c.Filter.Rate())))
	}
	return apart, apart <= tolerance
}

// difference is the largest of two paths' responses in dB; q waits for shift
// samples.
func difference(p, q *filter.Path, shift int, rate float64) float64 {
	size := response.NextPow2(max(len(p.System.Taps), len(q.System.Taps), int(rate)))
	a, b := p.System.Spectrum(size), q.System.Spectrum(size)
	top := 0.0
	for _, v := range a {
		top = max(top, cmplx.Abs(v))
	}
	worst := 0.0
	for k := range a {
		turn := cmplx.Rect(1, -2*math.Pi*float64(k)*float64(shift)/float64(size))
		worst = max(worst, cmplx.Abs(a[k]-b[k]*turn)/max(cmplx.Abs(a[k]), agreeFloor*top))
	}
	return 20 * math.Log10(1+worst)
}

// Row is one or more candidates that agree. The first is the one to take, since
// it costs least: its figures are shown.
type Row struct {
	Candidates []*Candidate
	Apart      float64 // dB, see Candidate.Agrees; 0 for one candidate
}

// Shown is the candidate whose figures stand for the row.
func (r *Row) Shown() *Candidate { return r.Candidates[0] }

// Names lists the candidates' realisations.
func (r *Row) Names() []string {
	var names []string
	for _, c := range r.Candidates {
		names = append(names, c.Name)
	}
	return names
}

// rowsOf gathers candidates of one chain that agree.
func rowsOf(candidates []*Candidate) []*Row {
	var rows []*Row
	for _, c := range candidates {
		i := slices.IndexFunc(rows, func(r *Row) bool { return r.takes(c) })
		if i < 0 {
			rows = append(rows, &Row{Candidates: []*Candidate{c}})
		}
	}
	for _, r := range rows {
		slices.SortStableFunc(r.Candidates, func(a, b *Candidate) int {
			return cmp.Compare(a.operations(), b.operations())
		})
	}
	return rows
}

// takes takes a candidate in if it agrees with all that are there.
func (r *Row) takes(c *Candidate) bool {
	apart := r.Apart
	for _, other := range r.Candidates {
		by, ok := other.Agrees(c)
		if !ok {
			return false
		}
		apart = max(apart, by)
	}
	r.Candidates, r.Apart = append(r.Candidates, c), apart
	return true
}
