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

// tone makes a stage of one section with a gain in dB, of which each way of a
// forward and backward run takes half.
func tone(gain float64, make func(rate, gainDB float64) (response.Section, error)) func(float64) (plan, error) {
	return func(rate float64) (plan, error) {
		s, err := make(rate, gain)
		if err != nil {
			return plan{}, err
		}
		p := curve([]response.Section{s})
		p.half = func() ([]response.Section, error) { return one(make(rate, gain/2)) }
		return p, nil
	}
}

func one(s response.Section, err error) ([]response.Section, error) {
	return []response.Section{s}, err
}

func readBell(f *fields, _ *Chain) func(float64) (plan, error) {
	at, gain := f.hz("at"), f.gain("gain")
	bell := design.Bell
	if f.matched() {
		bell = design.MatchedBell
	}
	if f.oneOf("q", "width", "1.1") == "width" {
		width := f.octaves("width")
		return tone(gain, func(rate, gain float64) (response.Section, error) {
			return bell(rate, at, gain, design.BandwidthQ(rate, at, width))
		})
	}
	q := f.positive("q")
	return tone(gain, func(rate, gain float64) (response.Section, error) { return bell(rate, at, gain, q) })
}

// matched tells whether a stage follows its analogue prototype up to half the
// rate, where the bilinear transform cramps it.
func (f *fields) matched() bool { return f.word("matched", "false", "true", "false") == "true" }

// octaves reads a bandwidth.
func (f *fields) octaves(key string) float64 {
	n := f.need(key, octaves.example)
	v := f.d.quantity(n, key, octaves)
	if f.d.err == nil && !(v > 0 && v <= maxOctaves) {
		f.d.fail(n, "'%s' is %s; it must be above 0 oct and at most %d oct", key, describe(n), maxOctaves)
	}
	return v
}

// shelf makes a section of a given steepness, a q or a slope.
type shelf func(rate, hz, gainDB, steepness float64) (response.Section, error)

// shelfReader reads a shelf, by q or by slope; slope 1, the steepest that does
// not overshoot, unless said.
func shelfReader(byQ, bySlope, matched shelf) func(*fields, *Chain) func(float64) (plan, error) {
	return func(f *fields, _ *Chain) func(float64) (plan, error) {
		at, gain := f.hz("at"), f.gain("gain")
		byQ, bySlope := byQ, bySlope
		if f.matched() {
			byQ, bySlope = matched, matched.bySlope
		}
		make, steepness := bySlope, 1.0
		switch f.either("q", "slope") {
		case "q":
			make, steepness = byQ, f.positive("q")
		case "slope":
			steepness = f.positive("slope")
		}
		return tone(gain, func(rate, gain float64) (response.Section, error) { return make(rate, at, gain, steepness) })
	}
}

// bySlope makes a shelf of a slope by one that takes a q.
func (s shelf) bySlope(rate, hz, gainDB, slope float64) (response.Section, error) {
	q, err := design.ShelfQ(gainDB, slope)
	if err != nil {
		return response.Section{}, err
	}
	return s(rate, hz, gainDB, q)
}

func readNotch(f *fields, _ *Chain) func(float64) (plan, error) {
	at := f.hz("at")
	var width float64
	if f.oneOf("q", "width", "12") == "width" {
		width = f.hz("width")
	} else {
		width = at / f.positive("q")
	}
	c := readDepth(f, true)
	return func(rate float64) (plan, error) {
		s, err := design.NotchWidth(rate, at, width)
		if err != nil {
			return plan{}, err
		}
		p := curve([]response.Section{s})
		p.cusps = c.of(p.sections)
		p.half = func() ([]response.Section, error) { return one(design.NotchWidth(rate, at, width*design.HalfWidth)) }
		return p, nil
	}
}

func readAllpass(f *fields, _ *Chain) func(float64) (plan, error) {
	at := f.hz("at")
	order, q := 1, math.Sqrt2/2
	switch f.either("q", "order") {
	case "q":
		order, q = 2, f.positive("q")
	case "order":
		order = f.d.whole(f.need("order", "1"), "order", 1, 2)
	}
	return biquad(func(rate float64) (response.Section, error) {
		if order == 1 {
			return design.AllPassFirst(rate, at)
		}
		return design.AllPass(rate, at, q)
	})
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
		p.cusps = c.of(p.sections)
		p.half = func() ([]response.Section, error) { return one(design.DC(rate, at*design.HalfWidth)) }
		return p, nil
	}
}

func readGain(f *fields, _ *Chain) func(float64) (plan, error) {
	by := f.gain("by")
	return func(float64) (plan, error) { return plan{gain: math.Pow(10, by/20)}, nil }
}

func readDelay(f *fields, _ *Chain) func(float64) (plan, error) {
	n := f.need("by", "2 ms")
	text := f.d.text(n, "by")
	by, err := parseSpan(text)
	if err == nil {
		err = by.check()
	}
	if err != nil {
		f.d.fail(n, "'by' is %s: %v", quote(text), err)
	}
	return func(rate float64) (plan, error) { return plan{gain: 1, delay: by.Samples(rate)}, nil }
}
