package capture

import (
	"fmt"
	"math"

	"fettle/audit/estimate"
	"fettle/filter/response"

	"gonum.org/v1/gonum/dsp/fourier"
)

// A device that distorts at the sample rate itself, without oversampling, folds its
// harmonics over half the rate: order k of a note f sounds at g = |m·rate - k·f|. Deconvolved,
// it stands where no other distortion does, L·ln(f/g) after the response, and crosses
// it where f is g. It cannot be cut off there, and makes windows as long as it is.
// What can be done is to know it by its trace over frequency and time: cells of it are louder
// than those before and after, which a decay never is, nor an echo at more than one frequency.

const (
	highestTrace = 0.46 // of the rate; what is above is hardly measured
	traceSteps   = 24.0 // an octave
	traceWidth   = 12.0 // as many cells as wide as this fill an octave
	// cells of less bandwidth times duration tell nothing: of 8, noise is three times as
	// loud as its neighbours in 0.4 % of cases (F distribution, 16 and 32 degrees of freedom).
	leastCell = 8.0
	onTrace   = 3.0
	// leastHits is how many cells a trace needs, and half of those in the windows.
	leastHits = 4
	// traceShare is -110 dB of the response in the same band: a third of a second late, it
	// adds a microsecond of spread.
	traceShare = 1e-11
)

// warnFolded says so when harmonics are folded into the windows, and tells whether
// they are.
func (r *Result) warnFolded(m *measurement, linear []float64) bool {
	if m.p.OrderLead(2) == 0 {
		return false // an impulse cannot tell
	}
	t := &traces{measurement: m, size: response.NextPow2(len(linear))}
	t.bins = response.Spectrum(linear, t.size)
	rate := float64(m.p.Rate)
	loudest, order := trace{}, 0
	for k := 2; k <= ordersOf; k++ {
		for fold := 1; fold <= k/2; fold++ {
			for _, sign := range []float64{-1, 1} {
				found := t.find(func(hz float64) float64 { return (float64(fold)*rate + sign*hz) / float64(k) })
				if found.energy > loudest.energy {
					loudest, order = found, k
				}
			}
		}
	}
	if order > 0 {
		r.Warnings = append(r.Warnings, fmt.Sprintf("channel %d holds harmonics of order %d folded over half the sample rate, as a digital device without oversampling makes them; "+
			"figures from %.1f kHz up count them as response: lower the level, or make a probe that ends at %.0f Hz", r.Channel, order, loudest.from/1e3, rate/float64(2*order)))
	}
	return order > 0
}

// traces looks for harmonics in a region of the linear response.
type traces struct {
	*measurement
	size int
	bins []complex128
}

// trace is a folded harmonic that was found.
type trace struct {
	energy float64
	from   float64 // the lowest frequency in Hz at which it is response for the windows
}

// find looks for a trace. note is the note whose harmonic folds to a frequency.
func (t *traces) find(note func(hz float64) float64) (found trace) {
	hits, misses := 0, 0
	for i := 0.0; ; i++ {
		hz := highestTrace * float64(t.p.Rate) * math.Exp2(-i/traceSteps)
		if hz < t.p.From {
			break
		}
		if f := note(hz); f < t.p.From || f > t.p.To || !t.inWindow(hz, t.after(hz, note)) {
			continue
		}
		found.from = hz
		switch energy, tells := t.cell(hz, note); {
		case energy > 0:
			hits++
			found.energy += energy
		case tells:
			misses++
		}
	}
	if hits < leastHits || hits < misses {
		return trace{}
	}
	return found
}

// after is how many samples after the response a trace stands.
func (t *traces) after(hz float64, note func(hz float64) float64) float64 {
	return t.p.OrderLead(note(hz)/hz) * t.stretch
}

// inWindow tells whether the windows let a frequency through so many samples after the
// response.
func (t *traces) inWindow(hz, after float64) bool {
	index := t.peak + int(after)
	return index >= 0 && index < t.early+t.late && t.gates.windows[t.gates.octaveOf(hz)].at(index) > 0
}

// cell is the energy of a trace about a frequency, 0 if it is no louder than what is before
// and after; and whether it would tell.
func (t *traces) cell(hz float64, note func(hz float64) float64) (energy float64, tells bool) {
	half := math.Exp2(0.5 / traceWidth)
	place, width := t.after(hz, note), math.Abs(t.after(hz*half, note)-t.after(hz/half, note))
	at := float64(t.peak) + place
	first, last := at-2.5*width, at+2.5*width
	bandwidth := hz * (half - 1/half)
	if bandwidth*width < leastCell*float64(t.p.Rate) || math.Abs(place) < 3*width ||
		first < 0.1*float64(t.early) || last > float64(t.early)+0.9*float64(t.late) {
		return 0, false
	}
	e := t.envelope(hz/half, hz*half)
	own := e.sum(at-width/2, at+width/2)
	beside := (e.sum(first, first+width) + e.sum(last-width, last)) / 2
	if own > onTrace*beside && own > traceShare*e.sum(0, float64(t.early+t.late)) {
		energy = own
	}
	return energy, true
}

// envelope is a band's energy over time, in steps of so many samples.
type envelope struct {
	energy []float64
	step   float64
}

func (t *traces) envelope(lo, hi float64) envelope {
	perBin := float64(t.size) / float64(t.p.Rate)
	from, to := int(math.Ceil(lo*perBin)), int(hi*perBin)
	points := response.NextPow2(2 * (to - from + 1))
	band := make([]complex128, points)
	for k := from; k <= to; k++ {
		band[k-from] = t.bins[k] * complex(smooth(2*float64(min(k-from, to-k)+1)/float64(to-from+2)), 0)
	}
	e := envelope{step: float64(t.size) / float64(points)}
	for _, v := range fourier.NewCmplxFFT(points).Sequence(nil, band) {
		e.energy = append(e.energy, estimate.Power(v))
	}
	return e
}

// sum is the energy between two indices of the response.
func (e envelope) sum(from, to float64) float64 {
	var sum float64
	for i := int(math.Round(from / e.step)); i < int(math.Round(to/e.step)); i++ {
		sum += e.energy[i]
	}
	return sum
}
