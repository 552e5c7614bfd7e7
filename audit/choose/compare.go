package choose

import (
	"fmt"
	"slices"

	"fettle/audit"
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
	// Purpose is what the output is for. Own: by limits only, or, when there are
	// none either, for each purpose in turn.
	Purpose Purpose
	Limits  []limits.Limit // the user's, beside each chain's own
}

// Comparison is the outcome. Rows are in the order of the chains and of the names.
type Comparison struct {
	Rate    int // Hz
	Kernel  machine.Kernel
	Rows    []*Row
	Refused []*Candidate
	// Advice has one entry when a purpose or a limit was given, else one for each
	// purpose.
	Advice []*Advice
}

// Compare realises, audits and judges. It fails when a chain's limits are none;
// a realisation that a chain refuses is in Refused.
func Compare(r Request) (*Comparison, error) {
	c := &Comparison{Rate: r.Rate, Kernel: r.Kernel}
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

// candidates compares the realisations of one chain.
func (c *Comparison) candidates(chain Chain, names []string) ([]*Row, error) {
	var all []*Candidate
	for _, name := range names {
		n := newCandidate(chain, name, c.Rate)
		if n.Refused != nil {
			c.Refused = append(c.Refused, n)
			continue
		}
		all = append(all, n)
	}
	rows := rowsOf(all)
	for _, r := range rows {
		var err error
		if r.Shown().Results, err = audit.Chain(r.Shown().Filter, c.Kernel); err != nil {
			return nil, err
		}
	}
	return rows, nil
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
