package onsets

import (
	"math"

	"gonum.org/v1/gonum/floats"
)

const (
	// quiet is how long nothing may stand ahead of an onset.
	quiet = 20e-3
	// together is how soon what is higher must follow to be of the same attack, and
	// how long the start of one may take: half a period of 50 Hz.
	together = 10e-3
	// attackEnds is how soon the peak must be reached.
	attackEnds = 50e-3

	// Levels are shares of the peak over the background. quietLevel and doubtLevel
	// stand 3 dB either side of onsetLevel, so that a treatment which changes the
	// balance of what is heard by less does not move the onset from one
	// sound to another.
	quietLevel, onsetLevel, doubtLevel      = 0.05, 0.10, 0.20
	nearRisenLevel, risenLevel, summitLevel = 0.80, 0.90, 0.97
	// grows is how much higher a processed onset must go on to rise after the
	// original's peak has passed to be read to its own peak.
	grows = 2.0
	// leastPeak is the least peak, -80 dB: under it a recording of 16 bits holds
	// little but its own steps.
	leastPeak = 1e-8
	// lead is how far ahead of a step in power the smoothed one crosses onsetLevel:
	// u - sin(2πu)/2π = 0.1 at u = 0.2589, and (1/2 - u)·smoothing.
	lead = 0.2411 * smoothing

	// near is how far a detection may be from its onset.
	near         = 35e-3
	contrastStep = 0.5e-3
	// reach is how far from its place in the original an onset is looked for in the
	// processed recording.
	reach = 20e-3
	// aside is how small, re the largest near it, what stands in place may be and
	// still be the onset: -30 dB.
	aside = 1e-3
	// settled is how little, in seconds, a time moves when it has been found.
	settled = 1e-10
)

// attack is how one signal rises at an onset. Times are seconds.
type attack struct {
	from, long       float64 // when the quiet ends; how much later the peak has passed
	peak, background float64
	onset, doubt     float64 // when it crosses onsetLevel and doubtLevel
	later            float64 // the most that follows the peak for another together, re it
}

// level is the power at a share of the peak.
func (a attack) level(share float64) float64 { return a.background + share*(a.peak-a.background) }

// attackAt reads the attack in the time long after the quiet, which ends at from;
// false when there is none. The background is taken from the quiet's first half: a
// slow attack begins in the second.
func (e *envelope) attackAt(from, long float64) (attack, bool) {
	a := attack{from: from, long: long, peak: e.most(from, from+long), background: e.mean(from-quiet, from-quiet/2)}
	a.doubt = e.climbs(a.level(doubtLevel), from-quiet, from+long)
	a.onset = e.left(a.level(onsetLevel), from-quiet, a.doubt)
	a.later = e.most(from+long, from+long+together) / a.peak
	return a, !math.IsNaN(a.onset) && a.background < onsetLevel*a.peak
}

// clearAttack finds the onset about a time of a detection, and after another time,
// if the waveform shows a clear one: out of quiet, at once, and to a peak.
func (e *envelope) clearAttack(detected, after float64) (attack, bool) {
	var a attack
	from := e.contrast(detected, after)
	if math.IsNaN(from) {
		return a, false
	}
	for range 4 { // from the coarse place to where quietLevel is crossed
		var ok bool
		if a, ok = e.attackAt(from, e.summit(from)); !ok {
			return a, false
		}
		from = e.left(a.level(quietLevel), a.doubt-together, a.doubt)
		if !(from-quiet >= e.start()) {
			return a, false
		}
		if math.Abs(from-a.from) < settled {
			break
		}
	}
	return a, e.isClear(a)
}

// isClear tells whether an attack comes out of quiet and climbs from quietLevel to
// doubtLevel at once, without turning back.
func (e *envelope) isClear(a attack) bool {
	begins := e.left(a.level(quietLevel), a.doubt-together, a.doubt)
	return a.background <= quietLevel*a.peak &&
		!math.IsNaN(begins) &&
		e.most(begins-quiet, begins-step) <= a.level(quietLevel) &&
		e.most(begins, a.onset-step) <= a.level(onsetLevel)
}

// contrast is the first time about a detection, and after another time, where what
// follows exceeds what went before as an onset must; NaN where nothing does.
func (e *envelope) contrast(detected, after float64) float64 {
	first := max(detected-near, e.start()+quiet, after)
	count := int((detected + near - first) / contrastStep)
	if count < 1 {
		return math.NaN()
	}
	back, ahead := int(quiet/contrastStep), int(together/contrastStep)
	g := e.grid(first-quiet, contrastStep, back+count+ahead)
	for i := range count {
		before, follows := g[i:i+back], g[i+back:i+back+ahead]
		if before[highest(before)] < quietLevel*follows[highest(follows)] {
			return first + float64(i)*contrastStep
		}
	}
	return math.NaN()
}

// summit is how long after a time the first peak has passed, attackEnds at most:
// nothing higher follows it within together.
func (e *envelope) summit(from float64) float64 {
	ends, next := int(attackEnds/step), int(together/step)
	g := e.grid(from, step, ends+next+1)
	at := highest(g[:next])
	for at < ends {
		higher := at + 1 + highest(g[at+1:at+1+next])
		if g[higher] <= g[at] {
			return min(float64(at+next)*step, attackEnds)
		}
		at = higher
	}
	return attackEnds
}

// highest is the index of the first largest value.
func highest(x []float64) int {
	at := 0
	for i, v := range x {
		if v > x[at] {
			at = i
		}
	}
	return at
}

// rise is the time from onsetLevel to risenLevel; NaN when that is not reached, or
// when the envelope turns back about it: then a small change would make a large
// one of the rise.
func (e *envelope) rise(a attack) float64 {
	reaches := func(share float64) float64 { return e.climbs(a.level(share), a.onset-step, a.from+a.long) }
	turned := e.left(a.level(nearRisenLevel), a.onset, reaches(summitLevel))
	if turned > reaches(nearRisenLevel)+step {
		return math.NaN()
	}
	return reaches(risenLevel) - a.onset
}

// answer finds in a processed signal what answers an attack of the original; from
// is the first guess at where its quiet ends. It is read in as long a stretch, so that
// what is alike is read alike; but to its own peak where, unlike the original, it goes
// on rising after that, as a smeared one does.
func (e *envelope) answer(original attack, from float64) (attack, bool) {
	var a attack
	smeared := false
	for range 5 {
		long := original.long
		if smeared {
			long = e.summit(from)
		}
		var ok bool
		a, ok = e.attackAt(from, long)
		if !smeared && a.later > grows*max(1, original.later) {
			smeared = true
			continue
		}
		if !ok {
			return a, false
		}
		from = original.from + a.onset - original.onset
		if math.Abs(from-a.from) < settled {
			break
		}
	}
	return a, true
}

// lagTo is by how much the envelope of a processed signal lags about an attack: the
// lag of the largest correlation.
func (e *envelope) lagTo(processed *envelope, a attack) float64 {
	const apart = 2 * step
	from := a.from - quiet
	span, most := int((quiet+a.long)/apart), int(reach/apart)
	x := e.grid(from, apart, span)
	y := processed.grid(from-reach, apart, span+2*most)
	best, lag := -1.0, 0
	for i := range 2*most + 1 {
		if c := floats.Dot(x, y[i:i+span]); c > best {
			best, lag = c, i-most
		}
	}
	return float64(lag) * apart
}
