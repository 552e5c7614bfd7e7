package audio

import "math"

const (
	// piece is how many windows are passed over at once.
	piece = 8
	// windowPieces is how many pieces the windows of one piece reach over.
	windowPieces = 1 + lineHistory/piece
	// batch is how many pieces candidates are collected from before the
	// interpolator runs on them: the more, the longer it works with an old peak.
	batch = 32
)

// scanner looks for the peak of a line, whose length is a multiple of piece.
type scanner struct {
	maxima []float64 // max|x| of every piece
	bends  []float64 // max|Δ²x| of every piece, where it was needed

	// The windows of a batch in which the interpolator may beat the peak so far,
	// by where they start: at n + 2/4, and at n + 1/4 or n + 3/4.
	middle, side   [batch * piece]int
	middles, sides int // how many
}

// newScanner makes a scanner for lines up to the given length.
func newScanner(longest int) scanner {
	return scanner{maxima: make([]float64, longest/piece), bends: make([]float64, longest/piece)}
}

// peak returns the larger of peak and what the interpolator finds in a line.
// Where it cannot find more than peak, as bounds tells, it is not run: that
// cannot change the result.
func (s *scanner) peak(line []float64, peak float64) float64 {
	pieces := len(line) / piece
	for j := range pieces {
		s.maxima[j] = largestSample((*[piece]float64)(line[j*piece:]))
	}
	end := pieces - windowPieces + 1
	for from := 0; from < end; from += batch {
		s.middles, s.sides = 0, 0
		s.collect(line, from, min(end, from+batch), peak)
		peak = s.interpolate(line, peak)
	}
	return peak
}

// collect finds the candidates among the windows of the pieces from up to end.
func (s *scanner) collect(line []float64, from, end int, peak float64) {
	known := from // bends
	for j := from; j < end; j++ {
		reach := largestPiece((*[windowPieces]float64)(s.maxima[j:]))
		if reach*interpolator.norm <= peak {
			continue
		}
		for known = max(known, j); known < j+windowPieces; known++ {
			s.bends[known] = bend(line[max(0, known*piece-2) : (known+1)*piece])
		}
		bend, slack := largestPiece((*[windowPieces]float64)(s.bends[j:])), rounding*reach
		inner := max(s.maxima[j+1], s.maxima[j+2])
		if inner+interpolator.lift*bend+slack <= peak {
			continue
		}
		s.add(line, j*piece+1, peak-interpolator.middleOff*bend-slack, peak-interpolator.sideOff*bend-slack)
	}
}

// add takes those of the windows of a piece, the first of which starts at from,
// whose |g·x| exceeds the limits. It does not branch, because which windows do is
// hard to foresee.
func (s *scanner) add(line []float64, from int, middleLimit, sideLimit float64) {
	x := (*[piece + 5]float64)(line[from+interpolatorTaps/2-3:])
	a, b, c, tilt := interpolator.near[0], interpolator.near[1], interpolator.near[2], interpolator.tilt
	middles, sides := s.middles, s.sides
	for i := range piece {
		g := math.Abs(a*(x[i+2]+x[i+3]) + b*(x[i+1]+x[i+4]) + c*(x[i]+x[i+5]))
		s.middle[middles], s.side[sides] = from+i, from+i
		middles += above(g, middleLimit)
		sides += above(g+math.Abs(tilt*(x[i+2]-x[i+3])), sideLimit)
	}
	s.middles, s.sides = middles, sides
}

// above is 0 if x <= limit, else 1.
func above(x, limit float64) int {
	if x <= limit {
		return 0
	}
	return 1
}

// interpolate runs the interpolator on the candidates.
func (s *scanner) interpolate(line []float64, peak float64) float64 {
	for _, from := range s.middle[:s.middles] {
		if v := interpolator.middlePeak((*window)(line[from:])); v > peak {
			peak = v
		}
	}
	for _, from := range s.side[:s.sides] {
		if v := interpolator.sidePeak((*window)(line[from:])); v > peak {
			peak = v
		}
	}
	return peak
}

// largest is the largest magnitude; of a piece and of what windows reach over,
// largestSample and largestPiece give it in little more than half the time.
func largest(x []float64) float64 {
	var peak uint64
	for _, v := range x {
		peak = max(peak, magnitude(v))
	}
	return math.Float64frombits(peak >> 1)
}

func largestSample(x *[piece]float64) float64 {
	return math.Float64frombits(max(
		magnitude(x[0]), magnitude(x[1]), magnitude(x[2]), magnitude(x[3]),
		magnitude(x[4]), magnitude(x[5]), magnitude(x[6]), magnitude(x[7]),
	) >> 1)
}

func largestPiece(x *[windowPieces]float64) float64 {
	return math.Float64frombits(max(magnitude(x[0]), magnitude(x[1]), magnitude(x[2]), magnitude(x[3])) >> 1)
}

// bend is the largest magnitude of a second difference. It needs two samples.
func bend(x []float64) float64 {
	var peak uint64
	last, slope := x[1], x[1]-x[0]
	for _, v := range x[2:] {
		next := v - last
		peak = max(peak, magnitude(next-slope))
		last, slope = v, next
	}
	return math.Float64frombits(peak >> 1)
}

// magnitude is the number of the bits of x without the sign, twice: these are
// ordered as the magnitudes are, and compare without branches.
func magnitude(x float64) uint64 { return math.Float64bits(x) << 1 }
