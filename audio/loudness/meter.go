package loudness

import (
	"fmt"
	"math"
)

const (
	// LeastRate is the lowest rate in Hz that is measured: under it the shelf has
	// no room.
	LeastRate = 4000

	offset       = -0.691 // dB: a sine of 997 Hz in one channel reads its own level
	absoluteGate = -70.0  // LKFS
	relativeGate = -10.0  // dB
	// A block is blockSteps steps long and begins a step after the one before.
	stepsASecond = 10
	blockSteps   = 4
)

// Meter measures one stream. It keeps 8 bytes for each tenth of a second. Not for
// concurrent use.
type Meter struct {
	rate      int
	weights   []weighting // one a channel
	frames    int64
	step      float64   // energy of the step that is being filled, over all channels
	steps     []float64 // energies of those before
	weighted  float64   // energy of all frames
	nextFrame int64     // where the step ends
}

// NewMeter makes a meter of a stream; rate is in Hz, 4000 or more. It panics
// unless channels is positive.
func NewMeter(rate, channels int) (*Meter, error) {
	if channels < 1 {
		panic(fmt.Sprintf("loudness: a meter for %d channels", channels))
	}
	if rate < LeastRate {
		return nil, fmt.Errorf("loudness is not defined at %d Hz; use a recording of at least %d Hz", rate, LeastRate)
	}
	m := &Meter{rate: rate, weights: make([]weighting, channels)}
	for c := range m.weights {
		m.weights[c] = newWeighting(float64(rate))
	}
	m.nextFrame = m.stepEnd(0)
	return m, nil
}

// stepEnd is the frame after a step: a tenth of a second need not be a whole number
// of them.
func (m *Meter) stepEnd(step int) int64 {
	return (int64(step+1)*int64(m.rate) + stepsASecond/2) / stepsASecond
}

// Add takes in interleaved frames, full scale 1.0. It panics unless len(frames) is
// a multiple of the channels.
func (m *Meter) Add(frames []float64) {
	channels := len(m.weights)
	if len(frames)%channels != 0 {
		panic(fmt.Sprintf("loudness: %d samples are no whole frames of %d channels", len(frames), channels))
	}
	for ; len(frames) > 0; frames = frames[channels:] {
		m.add(frames[:channels])
	}
}

func (m *Meter) add(frame []float64) {
	energy := 0.0
	for c, x := range frame {
		y := m.weights[c].next(x)
		energy += y * y
	}
	m.step += energy
	m.weighted += energy
	if m.frames++; m.frames == m.nextFrame {
		m.steps, m.step = append(m.steps, m.step), 0
		m.nextFrame = m.stepEnd(len(m.steps))
	}
}

// Loudness is the integrated loudness so far in LKFS; NaN, not stated, where no
// block is whole or none passes the gates: less than 400 ms, or hardly a sound.
func (m *Meter) Loudness() float64 {
	blocks := m.blocks()
	return level(mean(blocks, passing(blocks)))
}

// Over is by how many dB what m has measured is louder than what another meter has, of
// the same rate and length: over the blocks that pass the gates of both. So what is
// cleaned of its background, whose pauses are then gated, does not count as louder for
// that. NaN, not stated, where there are none.
func (m *Meter) Over(other *Meter) float64 {
	a, b := m.blocks(), other.blocks()
	if len(a) != len(b) {
		return math.NaN()
	}
	both := passing(a)
	for i, passes := range passing(b) {
		both[i] = both[i] && passes
	}
	return level(mean(a, both)) - level(mean(b, both))
}

// Ungated is the level in LKFS of all frames so far, of whatever length, without
// blocks and gates: what stands in where Loudness is not stated. Silence has -Inf,
// as has nothing at all.
func (m *Meter) Ungated() float64 {
	if m.frames == 0 {
		return math.Inf(-1)
	}
	return level(m.weighted / float64(m.frames))
}

// level is a mean square in LKFS.
func level(square float64) float64 { return offset + 10*math.Log10(square) }

// blocks are the mean squares of all whole blocks.
func (m *Meter) blocks() []float64 {
	var out []float64
	for last := blockSteps - 1; last < len(m.steps); last++ {
		first := last - blockSteps + 1
		sum := 0.0
		for _, e := range m.steps[first : last+1] {
			sum += e
		}
		out = append(out, sum/float64(m.stepEnd(last)-m.stepEnd(first-1)))
	}
	return out
}

// passing tells which blocks pass both gates.
func passing(blocks []float64) []bool {
	first := over(blocks, absoluteGate)
	return over(blocks, max(absoluteGate, level(mean(blocks, first))+relativeGate))
}

func over(blocks []float64, gate float64) []bool {
	out := make([]bool, len(blocks))
	for i, square := range blocks {
		out[i] = level(square) > gate
	}
	return out
}

// mean is that of some of the blocks; NaN of none.
func mean(blocks []float64, which []bool) float64 {
	sum, count := 0.0, 0.0
	for i, square := range blocks {
		if which[i] {
			sum += square
			count++
		}
	}
	return sum / count
}
