package filter

import (
	"fmt"

	"fettle/filter/design"
	"fettle/filter/response"
)

// Families of the four pass stages. The classical ones are recursive and have
// a curve, by order or by the least order for a mask; the others are kernels
// for a mask.
var (
	classical = map[string]design.Family{
		"butterworth": design.FamilyButterworth, "chebyshev1": design.FamilyChebyshev1,
		"chebyshev2": design.FamilyChebyshev2, "elliptic": design.FamilyElliptic,
		"bessel": design.FamilyBessel, "linkwitz-riley": design.FamilyLinkwitzRiley,
	}
	kernels = map[string]func(design.Mask) ([]float64, error){
		"kaiser": design.Kaiser, "equiripple": design.Equiripple, "least-squares": design.LeastSquaresFor,
	}
	families = []string{"butterworth", "chebyshev1", "chebyshev2", "elliptic", "bessel", "linkwitz-riley",
		"kaiser", "equiripple", "least-squares"}
)

// passReader reads highpass, lowpass, bandpass and bandstop.
func passReader(k design.Kind) func(f *fields, _ *Chain) func(float64) (plan, error) {
	return func(f *fields, _ *Chain) func(float64) (plan, error) {
		if k == design.Bandpass && f.keys["q"] != nil {
			return readResonator(f)
		}
		name := f.word("family", "butterworth", families...)
		if kernel, ok := kernels[name]; ok {
			f.owner += " of family " + name
			return readKernel(f, k, kernel)
		}
		family, ok := classical[name]
		if !ok { // a wrong word, complained of already
			return func(float64) (plan, error) { return plan{}, nil }
		}
		if f.keys["family"] != nil {
			f.owner += " of family " + name
		}
		if f.oneOf("at", "pass", "70 Hz") == "pass" {
			return readLeastOrder(f, k, family)
		}
		return readClassical(f, k, family)
	}
}

// readResonator reads a band-pass by its one centre and its q.
func readResonator(f *fields) func(float64) (plan, error) {
	at, q := f.hz("at"), f.positive("q")
	return biquad(func(rate float64) (response.Section, error) { return design.BandPass(rate, at, q) })
}

// edges reads one frequency, or two for a band filter.
func (f *fields) edges(key string, k design.Kind) []float64 {
	if k.Edges() == 2 {
		return f.hzPair(key)
	}
	return []float64{f.hz(key)}
}

// recursive is what a classical stage is made from.
type recursive struct {
	family         design.Family
	kind           design.Kind
	order          int
	ripple, reject float64 // dB, for the families that have them
	delay          bool    // a Bessel filter scaled by its delay
	at             []float64
}

// readClassical reads a corner and an order.
func readClassical(f *fields, k design.Kind, family design.Family) func(float64) (plan, error) {
	r := recursive{family: family, kind: k}
	for _, key := range maskKeys(family) {
		if v := f.keys[key]; v != nil {
			f.d.fail(v.Key, "'%s' describes a mask; give 'pass' and 'stop' in place of 'at' and 'order', or add family: kaiser", key)
		}
	}
	r.at = f.edges("at", k)
	r.order = f.d.whole(f.need("order", "4"), "order", 1, design.MaxOrder)
	switch family {
	case design.FamilyChebyshev1:
		r.ripple = f.needDB("ripple", "0.5 dB")
	case design.FamilyChebyshev2:
		r.reject = f.needDB("reject", "60 dB")
	case design.FamilyElliptic:
		r.ripple, r.reject = f.needDB("ripple", "0.5 dB"), f.needDB("reject", "60 dB")
	case design.FamilyBessel:
		r.delay = f.word("scale", "corner", "corner", "delay") == "delay"
	}
	c := readDepth(f, r.order == 1 && (k == design.Highpass || k == design.Bandstop) && family != design.FamilyChebyshev2)
	return func(rate float64) (plan, error) {
		zpk, err := r.design(rate)
		if err != nil {
			return plan{}, err
		}
		p := curve(zpk.Sections())
		p.half = func() ([]response.Section, error) { return sectionsOf(r.half(rate)) }
		if c != nil {
			p.cusps = c.of(p.sections)
		}
		return p, nil
	}
}

// maskKeys are what a mask has and a corner of the family has not.
func maskKeys(family design.Family) []string {
	keys := []string{"stop", "width"}
	if family != design.FamilyChebyshev1 && family != design.FamilyElliptic {
		keys = append(keys, "ripple")
	}
	if family != design.FamilyChebyshev2 && family != design.FamilyElliptic {
		keys = append(keys, "reject")
	}
	return keys
}

// needDB reads a level above 0 dB that must be there.
func (f *fields) needDB(key, example string) float64 {
	f.need(key, example)
	return f.positiveDB(key, 0)
}

func (r recursive) design(rate float64) (design.ZPK, error) {
	switch r.family {
	case design.FamilyChebyshev1:
		return design.Chebyshev1(r.kind, r.order, rate, r.ripple, r.at...)
	case design.FamilyChebyshev2:
		return design.Chebyshev2(r.kind, r.order, rate, r.reject, r.at...)
	case design.FamilyElliptic:
		return design.Elliptic(r.kind, r.order, rate, r.ripple, r.reject, r.at...)
	case design.FamilyBessel:
		if r.delay {
			return design.BesselDelay(r.kind, r.order, rate, r.at...)
		}
		return design.Bessel(r.kind, r.order, rate, r.at...)
	case design.FamilyLinkwitzRiley:
		return design.LinkwitzRiley(r.kind, r.order, rate, r.at...)
	}
	return design.Butterworth(r.kind, r.order, rate, r.at...)
}

// half designs what is run both ways under zero: half the order, half the
// ripple and the rejection.
func (r recursive) half(rate float64) (design.ZPK, error) {
	switch {
	case r.family == design.FamilyBessel:
		return design.ZPK{}, phaseError("a bessel filter is chosen for its group delay, which running both ways takes away; use butterworth, or linear")
	case r.order%2 == 1:
		return design.ZPK{}, phaseError(fmt.Sprintf("order %d is odd, and half of it runs each way; use order %d", r.order, r.order+1))
	case r.family == design.FamilyButterworth:
		return design.HalfButterworth(r.kind, r.order, rate, r.at...)
	case r.family == design.FamilyLinkwitzRiley: // which is a Butterworth twice
		return design.Butterworth(r.kind, r.order/2, rate, r.at...)
	}
	r.order, r.ripple, r.reject = r.order/2, r.ripple/2, r.reject/2
	return r.design(rate)
}

// readLeastOrder reads the mask that a classical filter of least order is to meet.
func readLeastOrder(f *fields, k design.Kind, family design.Family) func(float64) (plan, error) {
	mask := readMask(f, k)
	return func(rate float64) (plan, error) {
		m := mask
		m.Rate = rate
		zpk, order, err := design.LeastOrder(family, m)
		if err != nil {
			return plan{}, err
		}
		p := curve(zpk.Sections())
		p.notes = []string{fmt.Sprintf("%v %v of order %d, the least for its mask", family, k, order)}
		p.half = func() ([]response.Section, error) {
			if family == design.FamilyBessel {
				return sectionsOf(recursive{family: family}.half(rate))
			}
			zpk, _, err := design.LeastOrder(family, halved(m))
			return sectionsOf(zpk, err)
		}
		return p, nil
	}
}

func sectionsOf(zpk design.ZPK, err error) ([]response.Section, error) {
	if err != nil {
		return nil, err
	}
	return zpk.Sections(), nil
}

// halved is the mask that a filter run both ways must meet each way.
func halved(m design.Mask) design.Mask {
	m.RippleDB, m.RejectDB = m.RippleDB/2, m.RejectDB/2
	return m
}

// readDepth reads how deep a one-sided part must go, for stages that have one.
func readDepth(f *fields, oneSided bool) *depth {
	if !oneSided {
		return nil
	}
	return &depth{f.positiveDB("depth", 40)}
}

// readKernel reads the mask that a kernel is to meet: its edges, or a corner
// with a transition's width.
func readKernel(f *fields, k design.Kind, kernel func(design.Mask) ([]float64, error)) func(float64) (plan, error) {
	var mask design.Mask
	if f.oneOf("pass", "at", "12 kHz") == "at" {
		mask = readMaskAround(f, k)
		readRipples(f, &mask)
	} else {
		mask = readMask(f, k)
	}
	return func(rate float64) (plan, error) {
		m := mask
		m.Rate = rate
		if err := m.Validate(); err != nil {
			return plan{}, err
		}
		return plan{gain: 1, mask: &m, kernel: kernel, half: func() ([]response.Section, error) {
			zpk, _, err := design.EllipticFor(halved(m))
			return sectionsOf(zpk, err)
		}}, nil
	}
}

// readMask reads a mask by its edges.
func readMask(f *fields, k design.Kind) design.Mask {
	mask := design.Mask{Kind: k}
	copy(mask.Pass[:], f.edges("pass", k))
	copy(mask.Stop[:], f.edges("stop", k))
	readRipples(f, &mask)
	return mask
}

func readRipples(f *fields, mask *design.Mask) {
	mask.RippleDB = f.positiveDB("ripple", 0.1)
	mask.RejectDB = f.needDB("reject", "80 dB")
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
