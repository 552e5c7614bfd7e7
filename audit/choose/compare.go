package choose

import (
	"errors"
	"fmt"
	"slices"

	"fettle/audit"
	"fettle/audit/atonce"
	"fettle/audit/limits"
	"fettle/filter"
	"fettle/filter/stream/machine"
)

// Request is what shall be compared.
type Request struct {
	Chains []Chain
	Names  []string // of the candidates of each chain
	Rate   int      // Hz
	Kernel machine.Kernel
	// Recording is a file, at Rate, whose onsets are compared before and after; "": none.
	Recording string
	// Purpose is what the output is for. Own: by limits only, or, when there are
	// none either, for each purpose in turn.
	Purpose Purpose
	Limits  []limits.Limit // the user's, beside each chain's own
}

// Comparison is the outcome. Rows are in the order of the chains and of the names.
type Comparison struct {
	Rate      int // Hz
	Kernel    machine.Kernel
	Recording string // whose onsets were compared; "": none
	Rows      []*Row
	Refused   []*Candidate
	// Advice has one entry when a purpose or a limit was given, else one for each
	// purpose.
	Advice []*Advice
}

// Compare realises, audits and judges. It fails when a chain's limits are none;
// a realisation that a chain refuses is in Refused. It fails, too, when the recording cannot
// be read or does not suit a chain.
func Compare(r Request) (*Comparison, error) {
	c := &Comparison{Rate: r.Rate, Kernel: r.Kernel, Recording: r.Recording}
	var users [][]limits.Limit // of each row
	for _, chain := range r.Chains {
		own, err := limits.Resolve(chain.Limits)
		if err != nil {
			return nil, err
		}
		rows, err := c.candidates(chain, r.Names)
		if err != nil {
			return nil, err
		}
		for _, row := range rows {
			c.Rows = append(c.Rows, row)
			users = append(users, append(own[:len(own):len(own)], r.Limits...))
		}
	}
	for _, p := range r.purposes() {
		a, err := advise(p, c.Rows, users)
		if err != nil {
			return nil, err
		}
		c.Advice = append(c.Advice, a)
	}
	if a := c.Asked(); a != nil {
		a.enter()
	}
	return c, nil
}

// Asks tells whether one advice is asked for: by a purpose or by limits.
func (r Request) Asks() bool {
	return r.Purpose != Own || len(r.Limits) > 0 ||
		slices.ContainsFunc(r.Chains, func(c Chain) bool { return len(c.Limits) > 0 })
}

// purposes are what is asked about.
func (r Request) purposes() []Purpose {
	if r.Asks() {
		return []Purpose{r.Purpose}
	}
	var all []Purpose
	for _, rule := range rules {
		all = append(all, rule.Purpose)
	}
	return all
}

// Asked is the advice that was asked for; nil where there is one for each purpose.
func (c *Comparison) Asked() *Advice {
	if len(c.Advice) != 1 {
		return nil
	}
	return c.Advice[0]
}

// atOnce bounds the memory: the audit of a kernel that is long takes some 50 MB.
const atOnce = 4

// candidates compares the realisations of one chain.
func (c *Comparison) candidates(chain Chain, names []string) ([]*Row, error) {
	var all []*Candidate
	for _, n := range candidatesOf(chain, names, c.Rate) {
		if n.Refused != nil {
			c.Refused = append(c.Refused, n)
			continue
		}
		all = append(all, n)
	}
	rows := rowsOf(all)
	failed := make([]error, len(rows))
	atonce.Do(len(rows), atOnce, func(i int) {
		n := rows[i].Shown()
		n.Results, failed[i] = audit.Chain(n.Filter, c.Kernel)
	})
	if err := errors.Join(failed...); err != nil || c.Recording == "" {
		return rows, err
	}
	return rows, c.listen(rows)
}

// candidatesOf realises a chain as each name says. What written comes to under another of
// the names is designed once.
func candidatesOf(chain Chain, names []string, rate int) []*Candidate {
	made := make([]*Candidate, len(names))
	written, twin := slices.Index(names, AsWritten), slices.Index(names, string(chain.asWritten()))
	shared := written >= 0 && twin >= 0
	atonce.Do(len(names), atOnce, func(i int) {
		if !shared || i != twin {
			made[i] = newCandidate(chain, names[i], rate)
		}
	})
	if shared {
		n := *made[written]
		n.Name = names[twin]
		made[twin] = &n
	}
	return made
}

// listen compares the onsets of the recording for the candidate that each row shows.
func (c *Comparison) listen(rows []*Row) error {
	var filters []*filter.Filter
	for _, r := range rows {
		filters = append(filters, r.Shown().Filter)
	}
	heard, err := audit.Listen(c.Recording, c.Kernel, filters...)
	for i := range heard {
		rows[i].Shown().Onsets = heard[i]
	}
	return err
}

// MeasureSpeed fills in the speed of the candidate that each row shows.
func (c *Comparison) MeasureSpeed() (err error) {
	for _, row := range c.Rows {
		if row.Shown().Speed, err = speedOf(row.Shown().Filter, c.Kernel); err != nil {
			return err
		}
	}
	return nil
}

// Save is the text of a chain file that realises as a candidate does without
// being asked for a phase. It is realised and compared before it is given.
func (c *Candidate) Save() ([]byte, error) {
	saved := c.Chain
	if c.Name != AsWritten && c.Name != AsMixed {
		var err error
		if saved, err = c.Chain.rephased(c.Chain.uniform(filter.Realisation(c.Name))); err != nil {
			return nil, err
		}
	}
	again, err := saved.Realise(c.Filter.Rate(), filter.Written)
	if err != nil {
		return nil, err
	}
	if apart, ok := c.Agrees(&Candidate{Chain: saved, Filter: again}); !ok || apart > savedApart {
		return nil, errUnlike(saved, apart)
	}
	return saved.Text, nil
}

// savedApart in dB is rounding: the same designs of the same stages.
const savedApart = 1e-6

func errUnlike(saved Chain, apart float64) error {
	return fmt.Errorf("%s: with the advised phases in it, its chain would differ by %.3g dB from what was audited; set the phases by hand", saved.File, apart)
}
