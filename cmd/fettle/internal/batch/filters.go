package batch

import (
	"sync"

	"fettle/filter"
)

// filters realises the chain once a rate, whoever asks first.
type filters struct {
	chain *filter.Chain
	as    filter.Realisation
	mu    sync.Mutex
	made  map[int]func() (*filter.Filter, error)
}

func newFilters(chain *filter.Chain, as filter.Realisation) *filters {
	return &filters{chain: chain, as: as, made: map[int]func() (*filter.Filter, error){}}
}

func (f *filters) at(rate int) (*filter.Filter, error) {
	f.mu.Lock()
	get := f.made[rate]
	if get == nil {
		get = sync.OnceValues(func() (*filter.Filter, error) { return f.chain.Realise(rate, f.as) })
		f.made[rate] = get
	}
	f.mu.Unlock()
	return get()
}
