package audio

import "slices"

const (
	// chunkFrames is how many frames are passed over at once. A window that starts in
	// a chunk ends in the next one at the latest. Half as many take a fifth longer in
	// mono, where they are few vectors; twice as many are passed over less often.
	chunkFrames = 64
	// leadFrames come before a line, for its first second differences.
	leadFrames = 2
)

// scanner looks for the peak of a line of chunks, frames interleaved.
type scanner struct {
	channels int
	maxima   []float64 // max|x| of every chunk
	bends    []float64 // max|Δ²x| of every chunk
}

// newScanner makes a scanner for lines up to the given number of chunks.
func newScanner(channels, longest int) scanner {
	return scanner{channels: channels, maxima: make([]float64, longest), bends: make([]float64, longest)}
}

// measure finds the extremes of the chunks of a line, which leadFrames precede. Those
// of the first it knows already.
func (s *scanner) measure(line []float64, chunks int) {
	size := chunkFrames * s.channels
	extremes(s.maxima[1:chunks], s.bends[1:chunks], line[size:], s.channels, size)
}

// largest is the largest sample in the chunks measured.
func (s *scanner) largest(chunks int) float64 { return slices.Max(s.maxima[1:chunks]) }

// keep makes the last of the chunks the first of the next line.
func (s *scanner) keep(chunks int) {
	s.maxima[0], s.bends[0] = s.maxima[chunks-1], s.bends[chunks-1]
}

// peak returns the larger of peak and what the interpolator finds in the windows
// that start in any chunk but the last. Where it cannot find more than peak, as
// bounds tells, it is not run: that cannot change the result.
func (s *scanner) peak(line []float64, chunks int, peak float64) float64 {
	b, size := &interpolator.bounds, chunkFrames*s.channels
	line = line[leadFrames*s.channels:]
	for j := range chunks - 1 {
		reach, bend := max(s.maxima[j], s.maxima[j+1]), max(s.bends[j], s.bends[j+1])
		if b.most(reach, bend) <= peak {
			continue
		}
		near, slack := b.sketch(reach, bend)
		peak = points(line[j*size:(j+2)*size], s.channels, near, slack, peak)
	}
	return peak
}
