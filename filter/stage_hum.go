package filter

import (
	"fmt"
	"math"

	"fettle/filter/design"
	"fettle/filter/response"
)

// maxHarmonics bounds a comb: beyond it a hum fills the spectrum.
const maxHarmonics = 1000

// hum is a comb of notches on a mains frequency and its harmonics.
type hum struct {
	mains     float64 // Hz
	harmonics int     // the mains frequency included
	width     float64 // Hz between the -3 dB points of every notch, or
	share     float64 // a share of the notch's own frequency
	depth     *depth
}

// readHum reads the comb; the width of a notch may be given by how long it
// rings: to fall by 60 dB a notch B wide takes ln(1000)/(pi B).
func readHum(f *fields, _ *Chain) func(float64) (plan, error) {
	h := hum{mains: f.hz("mains")}
	h.harmonics = f.d.whole(f.need("harmonics", "8"), "harmonics", 1, maxHarmonics)
	if f.oneOf("width", "ring", "2 Hz") == "ring" {
		h.width = math.Log(1000) / (math.Pi * f.seconds("ring"))
	} else {
		h.width, h.share = f.hzOrShare("width")
	}
	h.depth = readDepth(f, true)
	return h.plan
}

// widthOf is the width of the k-th notch.
func (h hum) widthOf(k int) float64 { return h.width + h.share*h.mains*float64(k) }

// below is how many of the harmonics lie below half a rate, with their notches.
func (h hum) below(rate float64) int {
	for k := 1; k <= h.harmonics; k++ {
		if !(h.mains*float64(k)+h.widthOf(k) < rate/2) {
			return k - 1
		}
	}
	return h.harmonics
}

func (h hum) plan(rate float64) (plan, error) {
	n := h.below(rate)
	if n == 0 {
		return plan{}, fmt.Errorf("%g Hz with its width is not below half the rate (%g Hz)", h.mains, rate/2)
	}
	sections, err := h.sections(rate, n, 1)
	if err != nil {
		return plan{}, err
	}
	p := curve(sections)
	p.cusps = h.depth.of(sections)
	p.half = func() ([]response.Section, error) { return h.sections(rate, n, design.HalfWidth) }
	p.notes = append(p.notes, h.ringing(n))
	if widest := h.widthOf(n); n > 1 && widest > h.mains/2 {
		p.warnings = append(p.warnings, fmt.Sprintf("hum: notches %.4g Hz wide, %g Hz apart, take out most of what lies between them, too; make them narrower", widest, h.mains))
	}
	if n < h.harmonics {
		p.warnings = append(p.warnings, fmt.Sprintf("hum: harmonics %d to %d, from %g Hz, are not below half the rate of %g Hz and are left out",
			n+1, h.harmonics, h.mains*float64(n+1), rate))
	}
	return p, nil
}

// sections makes n notches, each as wide as asked times a factor.
func (h hum) sections(rate float64, n int, factor float64) ([]response.Section, error) {
	out := make([]response.Section, n)
	for i := range out {
		var err error
		if out[i], err = design.NotchWidth(rate, h.mains*float64(i+1), factor*h.widthOf(i+1)); err != nil {
			return nil, err
		}
	}
	return out, nil
}

// ringing says what the width costs: a notch B wide rings for 2.2/B seconds.
func (h hum) ringing(n int) string {
	first, last := h.widthOf(1), h.widthOf(n)
	ring := func(width float64) float64 { return 1e3 * math.Log(1000) / (math.Pi * width) }
	if first == last {
		return fmt.Sprintf("hum: %d notches %.4g Hz wide, each ringing %.0f ms to -60 dB", n, first, ring(first))
	}
	return fmt.Sprintf("hum: %d notches %.4g to %.4g Hz wide, ringing %.0f to %.0f ms to -60 dB", n, first, last, ring(first), ring(last))
}
