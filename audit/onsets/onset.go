package onsets

import "math"

// Onset is one onset. Times are seconds; NaN is not stated.
type Onset struct {
	Channel int // from 1
	// Time is the onset's, from the first frame.
	Time float64
	// Level is the envelope's peak in dB, where a power of 1 is 0: a sine of
	// full scale is at -3.
	Level float64
	// Rise is the time from a tenth to nine tenths of the peak.
	Rise float64

	// What follows is NaN unless two recordings are compared.

	// Shift is how much later the onset is in the processed recording, RiseChange how
	// much longer it rises there. A Shift that is not stated is of an onset lost.
	Shift, RiseChange float64
	// Early is the energy more than EarlyTimes before the onset that the original
	// does not show, dB re the onset's energy; figures.None: none seen.
	Early [len(EarlyTimes)]float64
	// Floor is the level in dB under which nothing is seen.
	Floor float64
}

func newOnset(channel int, x *envelope, a attack) Onset {
	o := Onset{
		Channel: channel, Time: a.onset + lead, Level: decibels(a.peak), Rise: x.rise(a),
		Shift: math.NaN(), RiseChange: math.NaN(), Floor: math.NaN(),
	}
	for i := range o.Early {
		o.Early[i] = math.NaN()
	}
	return o
}

// setEarly states early energy, unless the background hides too much.
func (o *Onset) setEarly(before, after early) {
	if levels, floor := after.added(before); floor <= decibels(mostFloor) {
		o.Early, o.Floor = levels, floor
	}
}
