package design

import (
	"cmp"
	"fmt"
	"math"
	"slices"

	"fettle/filter/response"
)

// Band is a stretch of frequency with a wanted gain. Between bands everything
// is allowed.
type Band struct {
	From, To         float64 // edges in Hz, 0..rate/2
	GainFrom, GainTo float64 // wanted gain at the edges, linear; straight between
	Weight           float64 // above 0; a deviation counts this many times
}

// Flat returns the band of one gain.
func Flat(from, to, gain, weight float64) Band {
	return Band{From: from, To: to, GainFrom: gain, GainTo: gain, Weight: weight}
}

func (b Band) gainAt(hz float64) float64 {
	return b.GainFrom + (b.GainTo-b.GainFrom)*(hz-b.From)/(b.To-b.From)
}

func (b Band) highest() float64 { return math.Max(math.Abs(b.GainFrom), math.Abs(b.GainTo)) }

func (b Band) String() string { return fmt.Sprintf("band %g to %g Hz", b.From, b.To) }

// BandSpec asks for a linear-phase kernel by bands. Its delay is (Taps-1)/2
// samples. A symmetric kernel has the response e^(-j omega (Taps-1)/2) A, an
// antisymmetric one j e^(-j omega (Taps-1)/2) A, where the real amplitude A
// follows the bands.
type BandSpec struct {
	Taps          int
	Antisymmetric bool
	Rate          float64
	Bands         []Band // ascending
}

// Type returns the linear-phase type that length and symmetry make.
func (s BandSpec) Type() response.Kind { return LinearPhaseType(s.Taps, s.Antisymmetric) }

// Validate reports the first thing that no kernel could satisfy: a length
// under 1; no bands, bands out of order, upside down, outside 0..Rate/2 or
// without a positive weight; gains that are no numbers; a gain wanted where
// the type has a forced zero.
func (s BandSpec) Validate() error {
	if !(s.Rate > 0) || math.IsInf(s.Rate, 1) {
		return fmt.Errorf("a rate of %g Hz is not a sample rate; it must be above 0 Hz", s.Rate)
	}
	if len(s.Bands) == 0 {
		return fmt.Errorf("no bands are given; give at least one")
	}
	for i, b := range s.Bands {
		if err := b.check(s.Rate); err != nil {
			return err
		}
		if i > 0 && !(s.Bands[i-1].To <= b.From) {
			return fmt.Errorf("%v begins before the %v ends; put bands in ascending order without overlap", b, s.Bands[i-1])
		}
	}
	return s.checkForcedZeros()
}

func (b Band) check(rate float64) error {
	switch {
	case !(b.From >= 0):
		return fmt.Errorf("%v begins below 0 Hz", b)
	case !(b.To <= rate/2):
		return fmt.Errorf("%v ends above half the sample rate (%g Hz)", b, rate/2)
	case !(b.From < b.To):
		return fmt.Errorf("%v has its lower edge not below its upper edge; swap or move them", b)
	case !(b.Weight > 0) || math.IsInf(b.Weight, 1):
		return fmt.Errorf("%v has a weight of %g; it must be above 0", b, b.Weight)
	case !(b.highest() <= math.MaxFloat64):
		return fmt.Errorf("%v has a gain of %g to %g; give finite factors, not dB", b, b.GainFrom, b.GainTo)
	}
	return nil
}

func (s BandSpec) checkForcedZeros() error {
	first, last := s.Bands[0], s.Bands[len(s.Bands)-1]
	passDC := first.From == 0 && first.GainFrom != 0
	passHalfRate := last.To == s.Rate/2 && last.GainTo != 0
	return checkForced("band with a gain there", s.Taps, s.Antisymmetric, passDC, passHalfRate)
}

// highest returns the largest gain asked for.
func (s BandSpec) highest() float64 {
	top := 0.0
	for _, b := range s.Bands {
		top = math.Max(top, b.highest())
	}
	return top
}

// constantGain tells whether all bands want one gain, and which.
func (s BandSpec) constantGain() (float64, bool) {
	g := s.Bands[0].GainFrom
	for _, b := range s.Bands {
		if b.GainFrom != g || b.GainTo != g {
			return 0, false
		}
	}
	return g, true
}

// width of all bands together, in radians.
func (s BandSpec) width() float64 {
	sum := 0.0
	for _, b := range s.Bands {
		sum += s.radians(b.To) - s.radians(b.From)
	}
	return sum
}

func (s BandSpec) radians(hz float64) float64 {
	if hz == s.Rate/2 {
		return math.Pi
	}
	return 2 * math.Pi * hz / s.Rate
}

// bands turns a mask into bands whose weighted deviation is at most 1 exactly
// where the mask is met. The passband aims midway between its bounds, not at
// 0 dB, so that up and down are used alike.
func (m Mask) bands() []Band {
	lo, hi := fromDB(-m.RippleDB), fromDB(m.RippleDB)
	pass := func(from, to float64) Band { return Flat(from, to, (hi+lo)/2, 2/(hi-lo)) }
	stop := func(from, to float64) Band { return Flat(from, to, 0, 1/fromDB(-m.RejectDB)) }
	half := m.Rate / 2
	switch m.Kind {
	case Lowpass:
		return []Band{pass(0, m.Pass[0]), stop(m.Stop[0], half)}
	case Highpass:
		return []Band{stop(0, m.Stop[0]), pass(m.Pass[0], half)}
	case Bandpass:
		return []Band{stop(0, m.Stop[0]), pass(m.Pass[0], m.Pass[1]), stop(m.Stop[1], half)}
	}
	return []Band{pass(0, m.Pass[0]), stop(m.Stop[0], m.Stop[1]), pass(m.Pass[1], half)}
}

// guards returns bands inside the transitions that are wider than the
// narrowest, a share of whose width stays free on either side: with the gain falling straight from the passband's bound to 0, or
// 0 all the way, and a weight under which a deviation of 1 reaches the bound.
// A free stretch much wider than another is where a kernel swings out.
func (m Mask) guards(share float64, straight bool) []Band {
	margin := share * m.Narrowest()
	bound := fromDB(m.RippleDB)
	var list []Band
	for i := range m.edges() {
		pass, stop := m.Pass[i], m.Stop[i]
		b := Band{From: math.Min(pass, stop) + margin, To: math.Max(pass, stop) - margin, Weight: 1 / bound}
		if !(math.Abs(stop-pass) > 1.2*m.Narrowest()) {
			continue
		}
		if straight && pass < stop {
			b.GainFrom = bound
		} else if straight {
			b.GainTo = bound
		}
		list = append(list, b)
	}
	return list
}

// ordered sorts bands by frequency.
func ordered(bands []Band) []Band {
	slices.SortFunc(bands, func(a, b Band) int { return cmp.Compare(a.From, b.From) })
	return bands
}
