package design

import (
	"fmt"
	"math"
	"slices"

	"fettle/filter/response"
)

// gridPoint is a frequency with what is wanted of the cosine polynomial there:
// the gain over the type's fixed factor, the weight times that factor. Its
// frequency is held as the squared sine and cosine of omega/2, of which
// one is small wherever cos(omega) loses digits.
type gridPoint struct {
	omega      float64
	sin2, cos2 float64
	want       float64
	weight     float64
	band       int
}

// factor is the part of the amplitude that the linear-phase type forces.
func factor(t response.Kind, omega float64) float64 {
	switch t {
	case response.TypeII:
		return math.Cos(omega / 2)
	case response.TypeIII:
		return math.Sin(omega)
	case response.TypeIV:
		return math.Sin(omega / 2)
	}
	return 1
}

// pointAt puts omega into a band.
func (s BandSpec) pointAt(omega float64, band int) gridPoint {
	sin, cos := math.Sincos(omega / 2)
	q := factor(s.Type(), omega)
	b := s.Bands[band]
	gain := b.gainAt(omega / (2 * math.Pi) * s.Rate)
	return gridPoint{omega: omega, sin2: sin * sin, cos2: cos * cos, want: gain / q, weight: b.Weight * q, band: band}
}

// gridder lays points through the bands.
type gridder struct {
	spec    BandSpec
	step    float64 // radians
	least   int     // steps that even the narrowest band gets, 0: refuse such a band
	crowded bool    // more points next to the edges, where extrema crowd
}

// grid returns the points of all bands in ascending order: each band from its
// lower edge by equal steps, the last moved to its upper edge, as McClellan,
// Parks & Rabiner (1973) do. An edge on a forced zero moves in by a step; on
// their own grid one within a step does, too.
func (g gridder) grid() ([]gridPoint, error) {
	zeroDC, zeroHalf := ForcedZeros(g.spec.Type())
	var all []gridPoint
	for i, b := range g.spec.Bands {
		from, to := g.spec.radians(b.From), g.spec.radians(b.To)
		step, err := g.stepFor(b, to-from)
		if err != nil {
			return nil, err
		}
		if zeroDC && (from == 0 || !g.crowded) {
			from = math.Max(from, step)
		}
		if zeroHalf && (to == math.Pi || !g.crowded) {
			to = math.Min(to, math.Pi-step)
		}
		for _, omega := range g.band(from, to, step) {
			all = append(all, g.spec.pointAt(omega, i))
		}
	}
	return all, g.enough(len(all))
}

// band lists the frequencies of one band.
func (g gridder) band(from, to, step float64) []float64 {
	var list []float64
	for n := 0; from+float64(n+1)*step <= to; n++ {
		list = append(list, from+float64(n)*step)
	}
	list = append(list, to)
	if !g.crowded || len(list) < 2 {
		return list
	}
	first, last := list[1]-from, to-list[len(list)-2]
	for _, part := range []float64{1. / 2, 1. / 4, 1. / 8, 1. / 16} {
		list = append(list, from+part*first, to-part*last)
	}
	slices.Sort(list)
	return slices.Compact(list)
}

func (g gridder) stepFor(b Band, width float64) (float64, error) {
	if width >= g.step*math.Max(1, float64(g.least)) {
		return g.step, nil
	}
	if g.least > 0 {
		return width / float64(g.least), nil
	}
	return 0, fmt.Errorf("%w: the %v is narrower than one step of the grid, %.4g Hz at %d taps; widen it, take more taps or a finer grid",
		errNarrow, b, g.step/(2*math.Pi)*g.spec.Rate, g.spec.Taps)
}

func (g gridder) enough(points int) error {
	if need := g.spec.cosines() + 1; points < need {
		return fmt.Errorf("%w: all bands together hold %d grid points where the exchange needs %d; widen the bands, take fewer taps or a finer grid",
			errNarrow, points, need)
	}
	return nil
}
