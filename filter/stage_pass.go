package filter

import (
	"math"

	"fettle/filter/design"
)

// passReader reads highpass, lowpass, bandpass and bandstop.
func passReader(k design.Kind) func(f *fields, _ *Chain) func(float64) (plan, error) {
	return func(f *fields, _ *Chain) func(float64) (plan, error) {
		if f.word("family", "butterworth", "butterworth", "kaiser") == "kaiser" {
			return readMask(f, k)
		}
		return readButterworth(f, k)
	}
}

// edges reads one frequency, or two for a band filter.
func (f *fields) edges(key string, k design.Kind) []float64 {
	if k == design.Bandpass || k == design.Bandstop {
		return f.hzPair(key)
	}
	return []float64{f.hz(key)}
}

func readButterworth(f *fields, k design.Kind) func(float64) (plan, error) {
	at := f.edges("at", k)
	order := f.d.whole(f.need("order", "4"), "order", 1, design.MaxOrder)
	c := readDepth(f, order == 1 && (k == design.Highpass || k == design.Bandstop))
	return func(rate float64) (plan, error) {
		zpk, err := design.Butterworth(k, order, rate, at...)
		if err != nil {
			return plan{}, err
		}
		p := curve(zpk.Sections())
		switch {
		case c == nil:
		case k == design.Highpass:
			p.cusp = c.highpass(at[0], rate)
		default:
			p.cusp = c.bandstop(at[0], at[1], rate)
		}
		return p, nil
	}
}

// readDepth reads how deep a one-sided part must go, for stages that have one.
func readDepth(f *fields, oneSided bool) *depth {
	if !oneSided {
		return nil
	}
	return &depth{f.db("depth", 40, true)}
}

// anyRate stands for a rate when a mask is checked before one is known.
const anyRate = math.MaxFloat64

// readMask reads a mask: its edges, or a corner with a transition's width.
func readMask(f *fields, k design.Kind) func(float64) (plan, error) {
	var mask design.Mask
	if f.has("at") {
		at, width := f.edges("at", k), f.hz("width")
		if f.d.err == nil {
			mask = design.MaskAround(k, 0, width, 0, 0, at...)
		}
	} else {
		mask.Kind = k
		copy(mask.Pass[:], f.edges("pass", k))
		copy(mask.Stop[:], f.edges("stop", k))
	}
	mask.RippleDB = f.db("ripple", 0.1, true)
	mask.RejectDB = f.db("reject", math.NaN(), true)
	if mask.Rate = anyRate; f.d.err == nil {
		if err := mask.Validate(); err != nil {
			f.d.fail(f.node, "%s: %v", f.owner, err)
		}
	}
	return func(rate float64) (plan, error) {
		m := mask
		m.Rate = rate
		if err := m.Validate(); err != nil {
			return plan{}, err
		}
		return plan{gain: 1, mask: &m}, nil
	}
}
