package onsets

import "math"

// highpassHz is the corner of the first-order high-pass that all that is measured
// goes through. It turns rumble at 11 Hz down by 19 dB, 100 Hz by 3, and delays
// nothing.
const highpassHz = 100.0

// signal is the last stretch of one channel, high-passed.
type signal struct {
	x    []float64
	from int64 // frame of x[0]
	rate float64

	gain, pole float64
	begun      bool
	in, out    float64 // the last samples
}

func newSignal(rate float64) *signal {
	pole := math.Exp(-2 * math.Pi * highpassHz / rate)
	return &signal{rate: rate, pole: pole, gain: (1 + pole) / 2}
}

// end is one past the last frame.
func (s *signal) end() int64 { return s.from + int64(len(s.x)) }

// append takes one channel, from 0, of interleaved frames.
func (s *signal) append(frames []float64, channel, channels int) {
	if !s.begun && len(frames) > 0 {
		s.in, s.begun = frames[channel], true // no step out of silence: an offset is none
	}
	in, out := s.in, s.out
	for i := channel; i < len(frames); i += channels {
		v := frames[i]
		out = s.gain*(v-in) + s.pole*out
		if math.Abs(out) < 1e-30 { // no denormal numbers in digital silence
			out = 0
		}
		in = v
		s.x = append(s.x, out)
	}
	s.in, s.out = in, out
}

// keep forgets all but the last frames, once as many are to be forgotten.
func (s *signal) keep(frames int) {
	if drop := len(s.x) - frames; drop > frames {
		s.x = s.x[:copy(s.x, s.x[drop:])]
		s.from += int64(drop)
	}
}

// copyTo fills dst from a frame on that the stretch holds.
func (s *signal) copyTo(dst []float64, at int64) { copy(dst, s.x[at-s.from:]) }

// between is what the stretch holds of the samples between two times, and the frame
// of the first.
func (s *signal) between(from, to float64) ([]float64, int64) {
	lo := min(max(int64(math.Ceil(from*s.rate)), s.from), s.end())
	hi := min(max(int64(math.Ceil(to*s.rate)), lo), s.end())
	return s.x[lo-s.from : hi-s.from], lo
}

// readInto gives an envelope the samples between two times.
func (s *signal) readInto(e *envelope, from, to float64) {
	x, at := s.between(from, to)
	e.read(x, at, s.rate)
}

// energy is that between two times, in full-scale-squared seconds.
func (s *signal) energy(from, to float64) float64 {
	x, _ := s.between(from, to)
	var sum float64
	for _, v := range x {
		sum += v * v
	}
	return sum / s.rate
}
