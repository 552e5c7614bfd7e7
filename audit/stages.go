package audit

import (
	"fettle/filter"
	"fettle/filter/stream/machine"
)

// Stages audits each stage of a chain by itself at a rate in Hz, as the chain
// realises it: what it costs. What stages cost does not add up. A stage that the
// rate leaves out has no result; of one that names channels the first is shown.
func Stages(c *filter.Chain, rate int, as filter.Realisation, kernel machine.Kernel) ([]*Result, error) {
	var out []*Result
	for i, s := range c.Stages {
		if !s.When.Holds(float64(rate)) {
			continue
		}
		f, err := c.Alone(i).Realise(rate, as)
		if err != nil {
			return nil, err
		}
		results, err := Chain(f, kernel)
		if err != nil {
			return nil, err
		}
		r := results[0]
		r.Stage = s.Text
		out = append(out, r)
	}
	return out, nil
}
