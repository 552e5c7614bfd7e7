package pair

import (
	"fmt"
	"math"
	"slices"

	"fettle/audit/estimate"
	"fettle/filter/response"

	"gonum.org/v1/gonum/dsp/fourier"
)

// AlignmentSize is the longest stretch, in frames, that an Alignment looks at.
const AlignmentSize = 1 << 13

const (
	shortestStretch  = 1 << 10
	secondsAStretch  = 10
	mostStretchesOf  = 12
	usualStretchesOf = 6
	// A recording shorter than one part of a long one gets fewer stretches, and
	// short ones: corpora hold thousands, and none may cost more than its filtering.
	shortStretchesOf = 4
	leastStretchesOf = 3 // give an interval that means something
)

// Alignment proves on a recording that an output stands where it should: the
// cross-spectrum of original and output, less the chain's own known response, is
// fitted to a delay.
//
// Feed it the two as they go by. Of every part of the recording it keeps the loudest
// stretch, filters the original's by the known response, and averages
// cross-spectra with the output's. The delay is the lag at which their correlation under
// the weights γ²/(1-γ²)/|Sxy| is largest, which are those of the largest likelihood
// (Hannan and Thomson 1973; Carter 1987, "Coherence and time delay estimation"); its interval
// is the jackknife's over the stretches. For one channel; not for concurrent use.
type Alignment struct {
	size  int          // of a stretch
	part  int64        // frames
	next  int64        // frame
	known []complex128 // at the bins of a stretch
	held  passage      // being filled
	best  passage      // loudest so far in this part
	sums  []*spectra   // of a stretch each
	tools *tools
}

// tools are what the stretches of a size are transformed by. They are kept: a batch proves
// thousands of recordings.
type tools struct {
	fft   *fourier.FFT
	welch *welch
}

var keptTools = estimate.Kept[*tools]{Make: func(size int) *tools {
	return &tools{fourier.NewFFT(size), newWelch(size / 2)}
}}

// passage is the same stretch of original and output.
type passage struct {
	x, y   []float64
	energy float64
}

// NewAlignment waits for so many frames of one channel at a rate in Hz; at the end
// of fewer or more it is only less even. known is the response that the output
// ought to have to the original, alignment included (H·e^(jωD) for a chain that has D
// samples removed), at bins 0 to K/2 of a transform of K points, a power of two and at
// least AlignmentSize. It panics on another length.
func NewAlignment(rate int, frames int64, known []complex128) *Alignment {
	points := 2 * (len(known) - 1)
	if points < AlignmentSize || points != response.NextPow2(points) {
		panic(fmt.Sprintf("pair: a response of %d bins; it needs one more than half a power of two of at least %d", len(known), AlignmentSize))
	}
	a := &Alignment{size: AlignmentSize}
	parts := min(max(frames/int64(secondsAStretch*rate), usualStretchesOf), mostStretchesOf)
	if frames < usualStretchesOf*AlignmentSize {
		a.size, parts = shortestStretch, shortStretchesOf
	}
	a.part = max(frames/parts, int64(a.size))
	for k := 0; k < len(known); k += points / a.size {
		a.known = append(a.known, known[k])
	}
	a.held, a.best = a.passage(), a.passage()
	a.tools = keptTools.Take(a.size)
	return a
}

func (a *Alignment) passage() passage {
	return passage{x: make([]float64, 0, a.size), y: make([]float64, 0, a.size)}
}

// Add takes the next frames of original and output. It panics unless there are as
// many of each.
func (a *Alignment) Add(original, output []float64) {
	if len(original) != len(output) {
		panic(fmt.Sprintf("pair: %d frames of the original, %d of the output", len(original), len(output)))
	}
	for len(original) > 0 {
		left := a.part - a.next%a.part
		n := int(min(int64(len(original)), int64(a.size-len(a.held.x)), left))
		a.held.x = append(a.held.x, original[:n]...)
		a.held.y = append(a.held.y, output[:n]...)
		original, output = original[n:], output[n:]
		a.next += int64(n)
		if len(a.held.x) == a.size {
			a.compare()
		}
		if int64(n) == left {
			a.endPart()
		}
	}
}

// compare keeps the stretch just filled if it is the loudest of its part so far: by its
// faintest quarter, since one that is silent for the most part tells little.
func (a *Alignment) compare() {
	a.held.energy = math.Inf(1)
	for q := range 4 {
		var e float64
		for _, v := range a.held.x[q*a.size/4 : (q+1)*a.size/4] {
			e += v * v
		}
		a.held.energy = min(a.held.energy, e)
	}
	if a.held.energy > a.best.energy {
		a.held, a.best = a.best, a.held
	}
	a.held.x, a.held.y = a.held.x[:0], a.held.y[:0]
}

// endPart takes in the best stretch of a part.
func (a *Alignment) endPart() {
	a.held.x, a.held.y = a.held.x[:0], a.held.y[:0]
	if a.best.energy == 0 {
		return
	}
	a.best.energy = 0
	bins := a.tools.fft.Coefficients(nil, a.best.x)
	for k := range bins {
		bins[k] *= a.known[k] / complex(float64(a.size), 0)
	}
	expected := a.tools.fft.Sequence(nil, bins)
	s := newSpectra(a.size / 2)
	// Away from the ends, where the circular convolution wraps round.
	for at := a.size / 8; at <= 3*a.size/8; at += a.size / 8 {
		a.tools.welch.pair(s, expected[at:at+a.size/2], a.best.y[at:at+a.size/2])
	}
	a.sums = append(a.sums, s)
}

// Placement is what an Alignment found.
type Placement struct {
	// Delay is how many samples later than it ought to be the output is; Err the
	// half width of its 95 % interval. NaN: not stated.
	Delay, Err float64
	// Inverted tells that the output has the wrong sign.
	Inverted bool
	// Coherence is γ² in the octave where it is greatest: the share of the output
	// that is the original filtered by the known response.
	Coherence float64
	// Stretches is how many were looked at, and Level the output's in them, RMS, dB re full
	// scale.
	Stretches int
	Level     float64
	// Unrelated tells that the output is loud enough to tell, and is not what it ought
	// to be: wrong, or farther off than a quarter of a stretch.
	Unrelated bool
	// NotStated says why there is no delay, or is "".
	NotStated string
}

const (
	// related is the least coherence of an output that is what it ought to be, and
	// chanceOf how many times what chance gives it is at least.
	related  = 0.2
	chanceOf = 4.0
	// gated is the energy, as a share of the expected, under which an output counts as
	// silent.
	gated = 1e-6
	// ringsOn is how many times the expected energy an output may hold: more comes from
	// before the stretch, in which then was little.
	ringsOn = 1000.0
	// sharp is how far the correlation's peak must stand above the next.
	sharp = 1.05
)

// Result fits the delay to all that was fed. It ends the Alignment: nothing may be added.
func (a *Alignment) Result() Placement {
	a.endPart()
	defer func() {
		keptTools.Give(a.size, a.tools)
		a.tools = nil
	}()
	p := Placement{Delay: math.NaN(), Err: math.NaN(), Stretches: len(a.sums)}
	all := newSpectra(a.size / 2)
	for _, s := range a.sums {
		all.add(s, 1)
	}
	p.Level = a.level(all)
	if p.NotStated = a.nothing(all); p.NotStated != "" {
		return p
	}
	var resolved bool
	if p.Coherence, resolved = all.bestOctave(); !resolved {
		p.NotStated = fmt.Sprintf("what the output holds lies too low for stretches of %d frames", a.size)
		return p
	}
	if p.Coherence < max(related, chanceOf/float64(all.segments)) {
		p.Unrelated = true
		p.NotStated = fmt.Sprintf("the output has little in common with what the chain makes of the original (coherence %.2f)", p.Coherence)
		return p
	}
	lag := all.lag()
	if p.Inverted = lag.Sign < 0; lag.Clear < sharp {
		p.NotStated = "the recording repeats itself, as a tone does: several delays fit alike"
		return p
	}
	var without []float64
	for _, s := range a.sums {
		without = append(without, all.without(s).lag().Samples)
	}
	p.Delay, p.Err = estimate.Jackknife(lag.Samples, without)
	return p
}

// level is the output's RMS in dB over all that was looked at.
func (a *Alignment) level(all *spectra) float64 {
	var power float64
	for k, v := range all.yy {
		if power += v; k > 0 {
			power += v // of the negative frequency
		}
	}
	var window float64
	for _, w := range a.tools.welch.window {
		window += w * w
	}
	return 10 * math.Log10(power/float64(2*a.tools.welch.size)/window/float64(all.segments))
}

// nothing says why there is nothing to measure, or "".
func (a *Alignment) nothing(all *spectra) string {
	if len(a.sums) < leastStretchesOf {
		return fmt.Sprintf("%d stretches of %d frames hold sound, %d are needed", len(a.sums), a.size, leastStretchesOf)
	}
	var expected, output float64
	for k := range all.xx {
		expected += all.xx[k]
		output += all.yy[k]
	}
	switch {
	case expected == 0:
		return "the chain leaves nothing of this recording"
	case output > ringsOn*expected:
		return "what rings on from before the stretches hides what they tell"
	case output <= gated*expected:
		return "the output is silent where it ought not to be"
	}
	return ""
}

// bestOctave is the coherence of the octave where it is greatest, among those that hold
// a thousandth of the output. Not resolved: none of the octaves that the stretches are
// long enough for does.
func (s *spectra) bestOctave() (best float64, resolved bool) {
	var all float64
	for _, v := range s.yy {
		all += v
	}
	for lo := 8; lo < len(s.yy); lo *= 2 {
		var own float64
		for _, v := range s.yy[lo:min(2*lo, len(s.yy))] {
			own += v
		}
		if own >= 1e-3*all {
			best, resolved = max(best, s.coherence(lo, 2*lo)), true
		}
	}
	return best, resolved
}

// leakage is the share of the strongest bin's power under which a bin may hold nothing but
// what a tone leaks there: it would make of a tone a sound of all frequencies.
const leakage = 1e-8

// lag is where the correlation under the weights of the largest likelihood is largest.
func (s *spectra) lag() estimate.Lag {
	weighted := make([]complex128, len(s.xy))
	least := leakage * slices.Max(s.xx)
	for k := 1; k < len(weighted)-1; k++ {
		m := math.Sqrt(estimate.Power(s.xy[k]))
		if m == 0 || s.xx[k] < least {
			continue
		}
		g := min(s.coherence(k-3, k+4), mostCoherent) // a Hann window spreads over as many
		weighted[k] = s.xy[k] * complex(g/(1-g)/m, 0)
	}
	return estimate.LagOf(weighted, 2*s.size())
}
