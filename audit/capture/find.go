package capture

import (
	"cmp"
	"fmt"
	"math"
	"slices"

	"fettle/audit/atonce"
	"fettle/audit/estimate"
	"fettle/audit/probe"
	"fettle/filter/response"

	"gonum.org/v1/gonum/dsp/fourier"
)

// sighting is the probe found in one channel.
type sighting struct {
	p probe.Parameters
	// pulses is the channel with the probe's phase taken out: sample n tells what
	// answers a repeat that starts at n.
	pulses []float64
	starts []int // of the repeats, by the peak of the response to each
}

// findIn looks for the probe in the loudest channel first.
func findIn(planes [][]float64, p probe.Parameters) (*sighting, error) {
	order := make([]int, len(planes))
	energy := make([]float64, len(planes))
	for c, y := range planes {
		order[c] = c
		for _, v := range y {
			energy[c] += v * v
		}
	}
	slices.SortStableFunc(order, func(a, b int) int { return cmp.Compare(energy[b], energy[a]) })
	for _, c := range order {
		if s := find(planes[c], p); s != nil {
			return s, nil
		}
	}
	return nil, fmt.Errorf("%w: nothing in it stands out at the distance of its repeats; check the cabling, raise the level, and record from before the first repeat to after the last", ErrNotFound)
}

// find returns nil when the channel does not hold the probe.
func find(y []float64, p probe.Parameters) *sighting {
	s := &sighting{p: p, pulses: compress(y, p)}
	width := max(p.Rate/1000, 1)
	b := newBoxes(s.pulses, width)
	once := b.best(p, 1)
	if !(once.score > 0) {
		return nil
	}
	for repeats := p.Repeats; repeats >= 1; repeats-- {
		at := once
		if repeats > 1 {
			at = b.best(p, repeats)
		}
		// Repeats are equally loud: a click that is no repeat must not hide them,
		// nor noise pass for the ones that a capture lacks.
		if at.score >= audible*b.median && at.score >= alike*once.score {
			for r := range repeats {
				s.starts = append(s.starts, s.peak(b.expected(p, at.box, r)))
			}
			return s
		}
	}
	return nil
}

const (
	// audible is how far, as a ratio of energies, every repeat must stand above
	// the median of a millisecond: chance does not bring 10 dB.
	audible = 10
	alike   = 0.05
)

// compress takes the phase of one repeat out of the capture's spectrum. Magnitudes stay,
// so that white noise stays white: division would raise it where the chirp is weak.
func compress(y []float64, p probe.Parameters) []float64 {
	once := p.Once(1)
	size := response.NextPow2(len(y) + len(once))
	spectra := make([][]complex128, 2)
	atonce.Do(2, 2, func(i int) { spectra[i] = response.Spectrum([][]float64{once, y}[i], size) })
	x, bins := spectra[0], spectra[1]
	var largest float64
	for _, v := range x {
		largest = max(largest, estimate.Power(v))
	}
	for k, v := range x {
		// Far outside the band there is no phase to take out, nor anything to find.
		scale := 1 / math.Sqrt(estimate.Power(v)+1e-6*largest) / float64(size)
		bins[k] *= complex(real(v)*scale, -imag(v)*scale)
	}
	return fourier.NewFFT(size).Sequence(nil, bins)[:len(y)]
}

// boxes is energy in boxes of equal width.
type boxes struct {
	width  int
	energy []float64
	median float64
}

// newBoxes sums the energy of x, and finds its median.
func newBoxes(x []float64, width int) *boxes {
	b := &boxes{width: width, energy: make([]float64, len(x)/width+1)}
	for i, v := range x {
		b.energy[i/width] += v * v
	}
	sorted := slices.Clone(b.energy)
	slices.Sort(sorted)
	b.median = sorted[len(sorted)/2]
	return b
}

// place is where a probe may begin.
type place struct {
	box   int
	score float64 // energy of the weakest repeat
}

// best is where the weakest of so many repeats is strongest.
func (b *boxes) best(p probe.Parameters, repeats int) place {
	best := place{score: -1}
	for at := range b.energy {
		weakest := math.Inf(1)
		for r := 0; r < repeats && weakest > best.score; r++ {
			if at+(r*p.Period+p.Signal)/b.width >= len(b.energy) { // it is cut off
				weakest = -1
				break
			}
			weakest = min(weakest, b.energy[b.expected(p, at, r)])
		}
		if weakest > best.score {
			best = place{at, weakest}
		}
	}
	return best
}

// expected is the strongest box where repeat r of a probe that begins in a box may
// stand, drift and the width of a box allowed for.
func (b *boxes) expected(p probe.Parameters, at, r int) int {
	if r == 0 {
		return at
	}
	centre := at + r*p.Period/b.width
	reach := 1 + int(float64(r*p.Period)*2*mostPPM*1e-6)/b.width
	best := min(centre, len(b.energy)-1)
	for i := max(0, centre-reach); i <= min(centre+reach, len(b.energy)-1); i++ {
		if b.energy[i] > b.energy[best] {
			best = i
		}
	}
	return best
}

// peak is the largest sample of a box and its neighbours.
func (s *sighting) peak(box int) int {
	width := max(s.p.Rate/1000, 1)
	best := min(box*width, len(s.pulses)-1)
	for i := max(0, (box-1)*width); i < min((box+2)*width, len(s.pulses)); i++ {
		if math.Abs(s.pulses[i]) > math.Abs(s.pulses[best]) {
			best = i
		}
	}
	return best
}
