package figures

import (
	"math"
	"testing"

	"fettle/filter/response"
)

// literally is a response from an index on, multiplied by the half-cosine step about another.
func literally(x []float64, from int, centre, periods float64) []float64 {
	y := make([]float64, 0, len(x))
	for n := from; n < len(x); n++ {
		switch u := (float64(n) - centre) / periods; {
		case u <= -0.5:
			y = append(y, x[n])
		case u < 0.5:
			y = append(y, x[n]*0.5*(1+math.Cos(math.Pi*(u+0.5))))
		}
	}
	return y
}

// What a band keeps of a response tells its energy as all samples do, by either road, however the
// cut moves, beside a line whose transform is 90 dB stronger. Of that the window's stopband, 281 dB
// down, and rounding leave some 1e-9 of the band. The ways to compare with are the definition's: every
// sample, every frequency.
func TestCutBandAgainstDefinition(t *testing.T) {
	for _, rate := range []float64{8000, 48000} {
		x := decaying(5, 6000)
		x[3000] += 3
		for n := range x {
			s := math.Sin(math.Pi * float64(n) / float64(len(x)))
			x[n] += 1000 * s * s * math.Sin(2*math.Pi*0.02*float64(n))
		}
		const from = 37
		for _, b := range Bands(rate) {
			c := newCutBand(b, x, rate, from, newGridKeeper())
			half := leastPeriods * rate / b.Centre
			for _, centre := range []float64{700.3, 120, 2950.2, 8000} {
				y := literally(x, from, centre, 2*half)
				c.energy(centre)
				within := func(what string, got, want float64) {
					t.Helper()
					if diff := math.Abs(got - want); !(diff <= 1e-8*want) {
						t.Errorf("%g Hz, band %g, cut at %g: %s %.12g, want %.12g", rate, b.Nominal, centre, what, got, want)
					}
				}
				seconds := float64(len(y)) / rate
				hz, width := legendre(b, seconds)
				want := 0.0
				for i, f := range hz {
					h, _ := transformAt(y, 0, f, rate)
					want += width[i] * power(h)
				}
				within("directly", c.sumDirectly(seconds), want)
				size := fastLength(max(len(y), int(binsOfCut*rate/b.width())))
				h, want := response.Spectrum(y, size), 0.0
				response.EachBin(rate/float64(size), b.Lower, b.Upper, func(k int, width float64) { want += width * power(h[k]) })
				within("over bins", c.sumOverBins(size), want)
			}
		}
	}
}

// Both roads to a band's energy lead to the same place.
func TestBandEnergyRoads(t *testing.T) {
	const rate = 8000.0
	y := decaying(5, 3000)
	for _, b := range Bands(rate) {
		c := newCutBand(b, y, rate, 0, newGridKeeper())
		c.energy(float64(2 * len(y))) // not cut
		size := fastLength(max(len(y), int(binsOfCut*rate/b.width())))
		// A transform as long as the response samples |Y|² at half the density it needs: 2 % of
		// energy, 0.1 dB, moves a ring of -60 dB by a thousandth of its length or so.
		within(t, "band energy", c.sumOverBins(size)/c.sumDirectly(float64(len(y))/rate), 1, 0.02)
	}
}
