package design

import "math"

// Level is what a magnitude must be at one frequency, linear.
type Level struct {
	// Aim is the value to design for.
	Aim float64
	// Low and High bound what may come out before any tolerance is given.
	// They are equal where the target is a plain curve; Low is 0 where deeper
	// is free.
	Low, High float64
	// Allow is the tolerance in dB at this frequency.
	Allow float64
}

// Target is a magnitude to be met.
type Target struct {
	// Grid gives the levels on the grid of a transform of size points, at
	// omega = 2 pi k/size for k = 0 to size/2; size is even. It is asked for
	// as a whole because a long kernel's magnitude is only cheap to know so.
	Grid func(size int) []Level
	// At gives the level at one frequency, and Points the frequencies where
	// a grid would have to be much denser than elsewhere: round its zeros.
	At     func(omega float64) Level
	Points []float64
}

// FloorDB is how far under the greatest target level an error is always
// forgiven: no kernel of finite length reaches a zero of the target exactly.
const FloorDB = -80

// Grid is a Target sampled: the grid's points, then the target's own.
type Grid struct {
	high, low []float64 // bounds before any tolerance
	allow     []float64 // tolerance as a share of the bound, 10^(Allow/20) - 1
	size      int
	points    []float64
	floor     float64
}

// Sample puts a target on the grid of a size-point transform.
func (t Target) Sample(size int) *Grid {
	g, _ := t.sample(size)
	return g
}

// sample also gives the aims on the grid proper.
func (t Target) sample(size int) (g *Grid, aims []float64) {
	levels := t.Grid(size)
	bins := len(levels)
	for _, omega := range t.Points {
		levels = append(levels, t.At(omega))
	}
	n := len(levels)
	g = &Grid{make([]float64, n), make([]float64, n), make([]float64, n), size, t.Points, 0}
	aims = make([]float64, bins)
	db, share := math.NaN(), 0.0
	for i, l := range levels {
		if l.Allow != db { // mostly the same from point to point
			db, share = l.Allow, math.Pow(10, l.Allow/20)-1
		}
		g.high[i], g.low[i], g.allow[i] = l.High, l.Low, share
		g.floor = math.Max(g.floor, l.High)
		if i < bins {
			aims[i] = l.Aim
		}
	}
	g.floor *= math.Pow(10, FloorDB/20.0)
	return g, aims
}

// Magnitude is |H| where a Grid asks for it: at bin k of its transform, and at
// a frequency between bins.
type Magnitude struct {
	Bin func(k int) float64
	At  func(omega float64) float64
}

// at is the magnitude at a grid's i-th level.
func (g *Grid) at(m Magnitude, i int) float64 {
	if bins := g.size/2 + 1; i >= bins {
		return m.At(g.points[i-bins])
	}
	return m.Bin(i)
}

// guard is the share of a tolerance that a design may use. On a grid of four
// points to a ripple of the error, the crest of one can stand between two
// points, 1 - cos(pi/8) = 7.6 % above them.
const guard = 0.92

// Met tells whether a magnitude keeps, with something in hand for what stands
// between the points (guard),
//
//	Low - a Low - floor <= |H| <= High + a High + floor
//
// at every point, with a = 10^(Allow/20) - 1. NaN fails.
func (g *Grid) Met(magnitude Magnitude) bool { return g.Excess(magnitude) <= guard }

// Excess is the error over the tolerance at the worst point: 1 uses all of it.
// NaN counts as without bound. The target's own points, which cost most, are
// only looked at when the grid is within bounds.
func (g *Grid) Excess(magnitude Magnitude) float64 {
	worst := 0.0
	for i, high := range g.high {
		if i == g.size/2+1 && worst > 1 {
			break
		}
		m := g.at(magnitude, i)
		if m <= high && m >= g.low[i] {
			continue
		}
		over, under := (m-high)/(g.allow[i]*high+g.floor), (g.low[i]-m)/(g.allow[i]*g.low[i]+g.floor)
		if e := math.Max(over, under); !(e <= worst) {
			worst = e
		}
	}
	if math.IsNaN(worst) {
		return math.Inf(1)
	}
	return worst
}

// ErrorDB is the least tolerance in dB, the same at every frequency, under
// which the magnitude would be met: the error that was actually reached.
func (g *Grid) ErrorDB(magnitude Magnitude) float64 {
	worst := 0.0
	for i, high := range g.high {
		m := g.at(magnitude, i)
		if math.IsNaN(m) {
			return math.NaN()
		}
		if over := m - high - g.floor; over > 0 {
			worst = math.Max(worst, ratio(over, high))
		}
		if under := g.low[i] - m - g.floor; under > 0 {
			worst = math.Max(worst, ratio(under, g.low[i]))
		}
	}
	return 20 * math.Log10(1+worst)
}

// ratio is err relative to level; both are above the floor when it matters,
// so a level of 0 with an error left over is an infinite one.
func ratio(err, level float64) float64 {
	if level == 0 {
		return math.Inf(1)
	}
	return err / level
}
