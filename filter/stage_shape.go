package filter

import (
	"math"

	"fettle/filter/design"
	"fettle/filter/response"
)

func curve(sections []response.Section) plan { return plan{gain: 1, sections: sections} }

// biquad makes a stage of one section.
func biquad(make func(rate float64) (response.Section, error)) func(float64) (plan, error) {
	return func(rate float64) (plan, error) {
		s, err := make(rate)
		if err != nil {
			return plan{}, err
		}
		return curve([]response.Section{s}), nil
	}
}

func readBell(f *fields, _ *Chain) func(float64) (plan, error) {
	at := f.hz("at")
	gain := f.db("gain", math.NaN(), false)
	if f.has("width") {
		width := f.d.quantity(f.need("width", octaves.example), "width", octaves)
		if f.d.err == nil && !(width > 0) {
			f.d.fail(f.keys["width"], "'width' must be above 0 oct")
		}
		return biquad(func(rate float64) (response.Section, error) {
			return design.Bell(rate, at, gain, design.BandwidthQ(rate, at, width))
		})
	}
	q := f.positive("q")
	return biquad(func(rate float64) (response.Section, error) { return design.Bell(rate, at, gain, q) })
}

// shelf makes a section of a given steepness, a q or a slope.
type shelf func(rate, hz, gainDB, steepness float64) (response.Section, error)

// shelfReader reads a shelf, by q or by slope; slope 1, the steepest that does
// not overshoot, unless said.
func shelfReader(byQ, bySlope shelf) func(*fields, *Chain) func(float64) (plan, error) {
	return func(f *fields, _ *Chain) func(float64) (plan, error) {
		at := f.hz("at")
		gain := f.db("gain", math.NaN(), false)
		make, steepness := bySlope, 1.0
		if f.has("q") {
			make, steepness = byQ, f.positive("q")
		} else if f.has("slope") {
			steepness = f.positive("slope")
		}
		return biquad(func(rate float64) (response.Section, error) { return make(rate, at, gain, steepness) })
	}
}

func readNotch(f *fields, _ *Chain) func(float64) (plan, error) {
	at := f.hz("at")
	var width, q float64
	if f.has("width") {
		width = f.hz("width")
	} else {
		q = f.positive("q")
		width = at / q
	}
	c := readDepth(f, true)
	return func(rate float64) (plan, error) {
		s, err := design.NotchWidth(rate, at, width)
		if err != nil {
			return plan{}, err
		}
		p := curve([]response.Section{s})
		p.cusp = c.notch(at, width, rate)
		return p, nil
	}
}

func readAllpass(f *fields, _ *Chain) func(float64) (plan, error) {
	at := f.hz("at")
	if f.has("q") {
		q := f.positive("q")
		return biquad(func(rate float64) (response.Section, error) { return design.AllPass(rate, at, q) })
	}
	order := 1
	if n, ok := f.get("order"); ok {
		order = f.d.whole(n, "order", 1, 2)
	}
	if order == 2 {
		return biquad(func(rate float64) (response.Section, error) { return design.AllPass(rate, at, math.Sqrt2/2) })
	}
	return biquad(func(rate float64) (response.Section, error) { return design.AllPassFirst(rate, at) })
}

func readDC(f *fields, _ *Chain) func(float64) (plan, error) {
	at := f.hz("at")
	c := readDepth(f, true)
	return func(rate float64) (plan, error) {
		s, err := design.DC(rate, at)
		if err != nil {
			return plan{}, err
		}
		p := curve([]response.Section{s})
		p.cusp = c.highpass(at, rate)
		return p, nil
	}
}

func readGain(f *fields, _ *Chain) func(float64) (plan, error) {
	by := f.db("by", math.NaN(), false)
	return func(float64) (plan, error) { return plan{gain: math.Pow(10, by/20)}, nil }
}

func readDelay(f *fields, _ *Chain) func(float64) (plan, error) {
	n := f.need("by", duration.example)
	var by Span
	if n != nil && f.d.err == nil {
		var err error
		if by, err = parseSpan(f.d.text(n, "by")); err != nil {
			f.d.fail(n, "'by': %v", err)
		} else if by.value < 0 {
			f.d.fail(n, "'by' is %s; a delay is not negative (to move a recording earlier, give 'align' a number of samples)", describe(n))
		}
	}
	return func(rate float64) (plan, error) { return plan{gain: 1, delay: by.Samples(rate)}, nil }
}
