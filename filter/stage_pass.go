package filter

import "fettle/filter/design"

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

// maskKeys describe a mask, which Butterworth has not.
var maskKeys = []string{"pass", "stop", "ripple", "reject", "width"}

func readButterworth(f *fields, k design.Kind) func(float64) (plan, error) {
	for _, key := range maskKeys {
		if v := f.keys[key]; v != nil {
			f.d.fail(v.Key, "'%s' describes a mask; add family: kaiser, or give a Butterworth %v by 'at' and 'order'", key, k)
		}
	}
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
	return &depth{f.positiveDB("depth", 40)}
}

// readMask reads a mask: its edges, or a corner with a transition's width.
func readMask(f *fields, k design.Kind) func(float64) (plan, error) {
	f.owner += " of family kaiser"
	mask := design.Mask{Kind: k}
	if f.oneOf("pass", "at", "12 kHz") == "at" {
		mask = readMaskAround(f, k)
	} else {
		copy(mask.Pass[:], f.edges("pass", k))
		copy(mask.Stop[:], f.edges("stop", k))
	}
	mask.RippleDB = f.positiveDB("ripple", 0.1)
	f.need("reject", "80 dB")
	mask.RejectDB = f.positiveDB("reject", 0)
	return func(rate float64) (plan, error) {
		m := mask
		m.Rate = rate
		if err := m.Validate(); err != nil {
			return plan{}, err
		}
		return plan{gain: 1, mask: &m}, nil
	}
}

// readMaskAround reads a corner, or two, and the width of the transition there.
func readMaskAround(f *fields, k design.Kind) design.Mask {
	at, width := f.edges("at", k), f.hz("width")
	if f.d.err == nil && !(width < 2*at[0]) {
		f.d.fail(f.keys["width"].Value, "'width' is %g Hz, so that the transition round %g Hz begins below 0 Hz; it must be less than %g Hz", width, at[0], 2*at[0])
	}
	f.d.highest = at[len(at)-1] + width/2
	return design.MaskAround(k, 0, width, 0, 0, at...)
}
