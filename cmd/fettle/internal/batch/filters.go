package batch

import (
	"cmp"
	"slices"
	"sync"

	"fettle/filter"
)

// Use is a chain at a rate in Hz.
type Use struct {
	Chain *filter.Chain
	Rate  int
}

// Uses lists the chains and rates of the recordings that are still to be
// treated, chains in the order of the plan.
func (p *Plan) Uses() []Use {
	var out []Use
	order := map[*filter.Chain]int{}
	for _, j := range p.Jobs {
		if _, ok := order[j.Chain]; !ok {
			order[j.Chain] = len(order)
		}
		if u := (Use{j.Chain, j.Rate}); j.Rate > 0 && !j.Done && !slices.Contains(out, u) {
			out = append(out, u)
		}
	}
	slices.SortFunc(out, func(a, b Use) int {
		return cmp.Or(cmp.Compare(order[a.Chain], order[b.Chain]), cmp.Compare(a.Rate, b.Rate))
	})
	return out
}

// Filter gives a chain realised at a rate, made once and shared.
func (p *Plan) Filter(u Use) (*filter.Filter, error) {
	p.mu.Lock()
	get := p.made[u]
	if get == nil {
		get = sync.OnceValues(func() (*filter.Filter, error) { return u.Chain.Realise(u.Rate, p.Options.Phase) })
		if p.made == nil {
			p.made = map[Use]func() (*filter.Filter, error){}
		}
		p.made[u] = get
	}
	p.mu.Unlock()
	return get()
}
