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
	// Grid gives the level at any point of the grid of a transform of size
	// points, at omega = 2 pi k/size for k = 0 to size/2; size is even. A grid
	// is asked for as a whole because a long kernel's magnitude is only cheap to
	// know so.
	Grid func(size int) func(k int) Level
	// At gives the level at one frequency, and Points the frequencies where
	// a grid would have to be much denser than elsewhere: round its zeros.
	At     func(omega float64) Level
	Points []float64
}

// FloorDB is how far under the greatest target level an error is always
// forgiven: no kernel of finite length reaches a zero of the target exactly.
const FloorDB = -80

// Grid is a Target sampled: the grid's points, then the target's own. A long grid takes
// much memory, so lists that say nothing new are left out.
type Grid struct {
	high   []float64 // upper bounds before any tolerance
	low    []float64 // lower ones; nil: the same
	allow  []float64 // tolerances as shares of the bounds, 10^(Allow/20) - 1; nil: share all along
	share  float64
	size   int
	points []float64
	floor  float64
}

// Sample puts a target on the grid of a size-point transform.
func (t Target) Sample(size int) *Grid { return t.sample(size, nil) }

// sample also writes the aims on the grid proper into aims, unless that is nil.
func (t Target) sample(size int, aims []float64) *Grid {
	level, bins := t.Grid(size), size/2+1
	g := &Grid{high: make([]float64, bins+len(t.Points)), size: size, points: t.Points}
	db, share := math.NaN(), 0.0
	for i := range g.high {
		var l Level
		if i < bins {
			l = level(i)
		} else {
			l = t.At(t.Points[i-bins])
		}
		if i < len(aims) {
			aims[i] = l.Aim
		}
		if l.Allow != db { // mostly the same from point to point
			db, share = l.Allow, math.Pow(10, l.Allow/20)-1
		}
		g.put(i, l, share)
	}
	g.floor *= math.Pow(10, FloorDB/20.0)
	return g
}

// put enters level i after those before it.
func (g *Grid) put(i int, l Level, share float64) {
	g.high[i] = l.High
	g.floor = math.Max(g.floor, l.High)
	if g.low == nil && l.Low != l.High {
		g.low = make([]float64, len(g.high))
		copy(g.low, g.high[:i])
	}
	if g.low != nil {
		g.low[i] = l.Low
	}
	if i == 0 {
		g.share = share
	}
	if g.allow == nil && share != g.share {
		g.allow = make([]float64, len(g.high))
		for j := range i {
			g.allow[j] = g.share
		}
	}
	if g.allow != nil {
		g.allow[i] = share
	}
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
	for i := range g.high {
		if i == g.size/2+1 && worst > 1 {
			break
		}
		worst = math.Max(worst, g.bounds(i).excess(g.at(magnitude, i)))
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
	for i := range g.high {
		worst = math.Max(worst, g.bounds(i).strayed(g.at(magnitude, i)))
	}
	return 20 * math.Log10(1+worst)
}

// bounds of a magnitude at one point: high and low before any tolerance, allow the
// tolerance as a share of them, floor what is forgiven besides.
type bounds struct{ high, low, allow, floor float64 }

func (g *Grid) bounds(i int) bounds {
	b := bounds{g.high[i], g.high[i], g.share, g.floor}
	if g.low != nil {
		b.low = g.low[i]
	}
	if g.allow != nil {
		b.allow = g.allow[i]
	}
	return b
}

// excess is the error over the tolerance; NaN if m is.
func (b bounds) excess(m float64) float64 {
	if m <= b.high && m >= b.low {
		return 0
	}
	return math.Max((m-b.high)/(b.allow*b.high+b.floor), (b.low-m)/(b.allow*b.low+b.floor))
}

// strayed is the least tolerance, as a share of the bounds, that m meets; NaN if m is.
func (b bounds) strayed(m float64) float64 {
	if over := m - b.high - b.floor; !(over <= 0) {
		return ratio(over, b.high)
	}
	if under := b.low - m - b.floor; under > 0 {
		return ratio(under, b.low)
	}
	return 0
}

// ratio is err relative to level; both are above the floor when it matters,
// so a level of 0 with an error left over is an infinite one.
func ratio(err, level float64) float64 {
	if level == 0 && !math.IsNaN(err) {
		return math.Inf(1)
	}
	return err / level
}
