package design

import "math"

// extremum is a local extreme of the weighted error, with sign.
type extremum struct {
	gridPoint
	height float64
}

// extrema lists the local extremes of the error in every band, edges included,
// in ascending order. The reference is scanned with the grid: there the error
// is +delta and -delta in turn, so that never fewer alternating extrema are
// found than the reference has points, however wild the curve between them.
func (x *exchanger) extrema(c *curve, ref []gridPoint) []extremum {
	points := x.heights(c, ref)
	var all []extremum
	for i, p := range points {
		left := i > 0 && points[i-1].band == p.band
		right := i+1 < len(points) && points[i+1].band == p.band
		if left && !beyond(p.height, points[i-1].height, true) || right && !beyond(p.height, points[i+1].height, false) {
			continue
		}
		switch {
		case x.parabolas == 0:
		case left && right:
			p = x.refined(c, points[i-1], p, points[i+1])
		case left:
			p = x.besideEdge(c, p, points[i-1])
		case right:
			p = x.besideEdge(c, p, points[i+1])
		}
		all = append(all, p)
	}
	return all
}

// heights merges grid and reference, both ascending, with the error at each.
func (x *exchanger) heights(c *curve, ref []gridPoint) []extremum {
	all := make([]extremum, 0, len(x.grid)+len(ref))
	delta := c.delta
	k := 0
	for i := range x.grid {
		p := &x.grid[i]
		for ; k < len(ref) && ref[k].omega <= p.omega; k++ {
			all = append(all, extremum{ref[k], delta})
			delta = -delta
		}
		if k == 0 || ref[k-1].omega != p.omega {
			all = append(all, extremum{*p, c.errorAt(p)})
		}
	}
	return all
}

// beyond tells whether e is at least as far from 0, on its own side, as its
// neighbour; of equals one is taken.
func beyond(e, neighbour float64, orEqual bool) bool {
	if e < 0 {
		e, neighbour = -e, -neighbour
	}
	return e > neighbour || orEqual && e == neighbour
}

// besideEdge looks whether the error rises from a band's edge inwards, and if so
// seeks the top between the edge and its neighbour.
func (x *exchanger) besideEdge(c *curve, edge, neighbour extremum) extremum {
	inner := x.at(c, edge.omega+1e-3*(neighbour.omega-edge.omega), edge.band)
	switch {
	case inner.height*edge.height < 0 || !beyond(inner.height, edge.height, false):
		return edge
	case edge.omega < neighbour.omega:
		return x.refined(c, edge, inner, neighbour)
	}
	return x.refined(c, neighbour, inner, edge)
}

func (x *exchanger) at(c *curve, omega float64, band int) extremum {
	p := x.spec.pointAt(omega, band)
	return extremum{p, c.errorAt(&p)}
}

// refined seeks the top between the neighbours of a point: a parabola
// through the three, then another through three points eight times closer
// about its summit, and so on. One alone is not enough next to an edge, where a
// ripple may be two steps wide.
func (x *exchanger) refined(c *curve, left, top, right extremum) extremum {
	from, to := left.omega, right.omega
	sign := math.Copysign(1, top.height)
	at := func(omega float64) extremum {
		return x.at(c, math.Max(from, math.Min(to, omega)), top.band)
	}
	for n := 1; ; n++ {
		if now := at(summit(left, top, right)); now.height*sign > top.height*sign {
			top = now
		}
		if n >= x.parabolas {
			return top
		}
		width := math.Ldexp(to-from, -1-3*n)
		left, right = at(top.omega-width), at(top.omega+width)
	}
}

// summit is where the parabola through three points in ascending order has its
// extreme; NaN if they lie on a line.
func summit(a, b, d extremum) float64 {
	fall := (a.height - b.height) / (a.omega - b.omega)
	rise := (d.height - b.height) / (d.omega - b.omega)
	curvature := (rise - fall) / (d.omega - a.omega)
	return (a.omega+b.omega)/2 - fall/(2*curvature)
}

// alternating keeps the higher of neighbours with one sign.
func alternating(all []extremum) []extremum {
	kept := all[:0]
	for _, e := range all {
		n := len(kept)
		if n == 0 || (e.height < 0) != (kept[n-1].height < 0) {
			kept = append(kept, e)
		} else if math.Abs(e.height) > math.Abs(kept[n-1].height) {
			kept[n-1] = e
		}
	}
	return kept
}

// strongest drops the lowest extrema until so many are left, in pairs inside
// so that signs still alternate, singly at the ends.
func strongest(all []extremum, need int) []extremum {
	for len(all) > need {
		last := len(all) - 1
		low := lowest(all)
		switch {
		case low == 0 || len(all) == need+1 && lower(all[0], all[last]):
			all = all[1:]
		case low == last || len(all) == need+1:
			all = all[:last]
		case lower(all[low-1], all[low+1]):
			all = append(all[:low-1], all[low+1:]...)
		default:
			all = append(all[:low], all[low+2:]...)
		}
	}
	return all
}

func lower(a, b extremum) bool { return math.Abs(a.height) < math.Abs(b.height) }

func lowest(all []extremum) int {
	low := 0
	for i := range all {
		if lower(all[i], all[low]) {
			low = i
		}
	}
	return low
}
