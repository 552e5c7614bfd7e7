package main

import (
	"math"
	"math/rand/v2"
)

// A strike is one blow on something that rings.
type strike struct {
	at    int // frame of the first contact
	kind  string
	level float64 // peak, relative to the loudest sound of the scene
}

// A mode is one way for a struck body to ring.
type mode struct {
	hz, level float64
	t60       float64 // s, time to fall by 60 dB
}

// A body is what is struck: its modes and the noise of the contact.
type body struct {
	contact, decay float64 // peak of the contact's noise and its time constant, s
	modes          []mode
}

// The bodies ring where wood and bronze of that size may ring (invented). The
// bell has the partials of a minor-third bell (hum, prime, tierce, quint,
// nominal and two above at 0.5, 1, 1.2, 1.5, 2, 3 and 4 times the prime:
// N. H. Fletcher and T. D. Rossing, The Physics of Musical Instruments, chapter
// on bells), each low one as a close pair, since no casting is quite round.
var bodies = map[string]body{
	"slate": {contact: 1, decay: 0.0015, modes: []mode{
		{1150, 0.35, 0.05}, {2310, 0.3, 0.035}, {3420, 0.25, 0.025}}},
	"knock": {contact: 0.6, decay: 0.0006, modes: []mode{
		{172, 0.3, 0.22}, {410, 0.5, 0.16}, {880, 0.35, 0.1}, {1570, 0.25, 0.06}, {2900, 0.2, 0.03}}},
	"bell": {contact: 0.7, decay: 0.0005, modes: []mode{
		{590, 0.25, 3.5}, {590.8, 0.1, 3.5}, {1180, 0.3, 2.2}, {1181.6, 0.15, 2.2},
		{1416, 0.3, 1.9}, {1417.7, 0.1, 1.9}, {1770, 0.1, 1.2}, {2360, 0.35, 1.1},
		{3540, 0.2, 0.6}, {4720, 0.12, 0.35}}},
}

// sound renders the strike from its first contact on, until it is 60 dB down.
// Its first frame carries the whole force of the contact, so the onset is sharp
// and known to the sample.
func (k strike) sound(rate int, r *rand.Rand) []float64 {
	b := bodies[k.kind]
	x := make([]float64, int(b.longest()*float64(rate)))
	for n := range x {
		t := float64(n) / float64(rate)
		x[n] = b.contact * 2 * triangular(r) * math.Exp(-t/b.decay)
		for _, m := range b.modes {
			x[n] += m.level * math.Pow(10, -3*t/m.t60) * math.Sin(2*math.Pi*m.hz*t)
		}
	}
	x[0] = b.contact
	return x
}

func (b body) longest() float64 {
	var t60 float64
	for _, m := range b.modes {
		t60 = max(t60, m.t60)
	}
	return t60
}
