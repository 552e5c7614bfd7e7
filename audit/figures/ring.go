package figures

// cutPeriods is the width of the half-cosine cut of band ring, and the shortest
// time it can tell, in periods of the band's centre.
const (
	cutPeriods   = 4.0
	leastPeriods = cutPeriods / 2
)

// ringer finds how long before the peak a band still rings. To look behind the
// peak, give it the response reversed in time.
type ringer struct {
	*profile
	x     []float64
	grids *gridKeeper
}

func newRinger(x []float64, rate float64) *ringer {
	return &ringer{profile: newProfile(x, rate), x: x, grids: newGridKeeper()}
}

// ring is the energy ahead of the peak, and the same under the weighting.
func (r *ringer) ring(l lobes, weighted *convolver) Ring {
	return Ring{White: r.column(l.white), Pink: newProfile(weighted.of(r.x), r.rate).column(l.pink)}
}

// early is the largest t, in seconds, at which the band's energy in the response
// cut t before its peak is -60 dB of its whole energy ∫|H|² df over the band;
// 0 when that is within two periods of the band's centre.
func (r *ringer) early(b Band, whole float64) float64 {
	limit := lengthThreshold * whole
	least, most := leastPeriods/b.Centre, r.atMost(b, limit)
	if most <= least {
		return 0
	}
	cut := newCutBand(b, r.x, r.rate, r.reaches(negligible*limit*2/r.rate), r.grids)
	over := func(t float64) float64 { return decibels(cut.energy(r.peak-t*r.rate) / limit) }
	nearest := over(least)
	if nearest < 0 {
		return 0
	}
	// From far to near, so that a gap in the ringing does not end the search early.
	const factor = 1.3
	far, near, farOver, nearOver := most, most, None, None
	for nearOver < 0 {
		far, farOver = near, nearOver
		if near = far / factor; near <= least {
			near, nearOver = least, nearest
		} else {
			nearOver = over(near)
		}
	}
	return r.crossing(over, near, far, nearOver, farOver)
}

// crossing narrows near..far, over which the energy falls through the limit (0 dB), to a
// sample or 0.1 %, whichever is longer. Ringing decays about exponentially, so it
// follows the straight line in dB: the Illinois rule (Dowell and Jarratt 1971,
// BIT 11), each step held off the ends so that it shortens the interval.
func (r *ringer) crossing(over func(float64) float64, near, far, nearOver, farOver float64) float64 {
	kept := 0
	for {
		least := max(1/r.rate, far*1e-3)
		if !(far-near > least) { // what is not a number ends it, too
			return near
		}
		t := near + (far-near)*nearOver/(nearOver-farOver)
		t = min(max(t, near+0.4*least), far-0.4*least)
		if v := over(t); v >= 0 {
			near, nearOver = t, v
			if kept > 0 {
				farOver /= 2
			}
			kept = 1
		} else {
			far, farOver = t, v
			if kept < 0 {
				nearOver /= 2
			}
			kept = -1
		}
	}
}

// atMost is a time beyond which the cut leaves too little energy in all for the
// band to reach the limit. By Parseval a band holds at most fs/2 times Σx².
func (r *ringer) atMost(b Band, limit float64) float64 {
	n := r.reaches(limit * 2 / r.rate)
	return (r.peak-float64(n))/r.rate + leastPeriods/b.Centre
}

// negligible is the share of the limit that samples ahead of the cut response may
// hold without being looked at: they move the result by less than 1e-3.
const negligible = 1e-7
