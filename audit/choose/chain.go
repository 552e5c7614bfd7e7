package choose

import (
	"os"
	"slices"

	"fettle/filter"
)

// Chain is a chain with its file's text, so that phases can be written into it.
type Chain struct {
	*filter.Chain
	Text []byte
}

// Load reads a chain file with its text. Errors are those of filter.Load.
func Load(path string) (Chain, error) {
	if _, err := filter.Load(path); err != nil { // which bounds the text
		return Chain{}, err
	}
	text, err := os.ReadFile(path)
	if err != nil {
		return Chain{}, err
	}
	c, err := filter.Parse(text, path)
	return Chain{c, text}, err
}

// Whether a stage's phase may be chosen: that of intent is wanted, coefficients
// are as somebody gave them, and given protects.
var (
	intent       = []string{"allpass", "delay", "gain"}
	coefficients = []string{"biquads", "fir"}
)

func isFree(s *filter.Stage) bool {
	return s.Phase != filter.Given && !slices.Contains(intent, s.Kind) && !slices.Contains(coefficients, s.Kind)
}

// asWritten is the realisation that would leave every stage as the file has it; Written:
// none would.
func (c Chain) asWritten() filter.Realisation {
	as := c.Phase
	if as == filter.Written {
		as = filter.Given
	}
	for _, s := range c.Stages {
		own := s.Phase
		if own == filter.Written && slices.Contains(coefficients, s.Kind) {
			own = filter.Given
		}
		if s.Phase != filter.Given && own != filter.Written && own != as {
			return filter.Written
		}
	}
	return as
}

// uniform is the chain's phases as Realise has them when it is asked for one.
func (c Chain) uniform(as filter.Realisation) phases {
	p := phases{chain: as}
	for _, s := range c.Stages {
		to := filter.Written
		named := s.Phase != filter.Written && s.Phase != filter.Given
		if named || s.Phase == filter.Written && slices.Contains(coefficients, s.Kind) {
			to = as
		}
		p.stages = append(p.stages, to)
	}
	return p
}
