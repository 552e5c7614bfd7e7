package main

// A scene is one recording: its file, its programme and its background.
type scene struct {
	path       string // below the folder of recordings, with slashes
	rate, bits int    // Hz; PCM word length
	frames     int
	peak       float64 // of the programme alone, dBFS
	strikes    []strike
	phrases    []phrase
	channels   []channel
	quiet      span // background only: no programme sounds here
}

// A channel is one microphone and the faults of its track. A level of 0 means
// that the fault is absent.
type channel struct {
	lag                      int     // frames by which the programme arrives late
	gain                     float64 // of the programme, 1 at the nearest microphone
	rumble, hum, hiss, water float64 // dBFS; hum is the level of the 50 Hz line alone
	dc                       float64 // of full scale
}

// A span holds the frames from <= n < to.
type span struct{ from, to int }

// An onset is the first frame of a sharp sound, before any channel's lag.
type onset struct {
	frame int
	what  string
}

// onsets lists the sharp onsets of a scene: every strike, and every phrase, as
// all phrases begin with a plosive. A plosive inside a phrase is left out: the
// vowel before it still rings, so its first frame cannot be told exactly.
func (s scene) onsets() []onset {
	var list []onset
	for _, k := range s.strikes {
		list = append(list, onset{k.at, k.kind})
	}
	for _, p := range s.phrases {
		list = append(list, onset{p.at, "plosive"})
	}
	return list
}

// The frames of onsets are prime numbers, so that none falls on the edge of a
// block of any length in use and hides an error there.
var scenes = []scene{
	{
		path: "interviews/deckhand_side_a.wav", rate: 16000, bits: 16, frames: 112000, peak: -7,
		strikes: []strike{{at: 8017, kind: "slate", level: 1}},
		phrases: []phrase{
			{at: 19213, pitch: 122, level: 0.9, text: "ta mo ri la te no ma"},
			{at: 47591, pitch: 116, level: 0.8, text: "ko le sa nu pi ra"},
			{at: 72211, pitch: 124, level: 0.9, text: "pe ni to mu la ka ro"},
		},
		channels: []channel{{gain: 1, rumble: -40, hum: -41, hiss: -61}},
		quiet:    span{96400, 112000},
	},
	{
		// The space in the name is wanted: batches meet such names.
		path: "interviews/engine tender.wav", rate: 16000, bits: 16, frames: 115200, peak: -8,
		strikes: []strike{{at: 7001, kind: "slate", level: 1}},
		phrases: []phrase{
			{at: 17011, pitch: 101, level: 0.9, text: "pa lo ne su ti ma"},
			{at: 43003, pitch: 97, level: 0.9, text: "te ra mi ko nu la so"},
			{at: 75011, pitch: 104, level: 0.8, text: "ka ne lo pu ri ta"},
		},
		channels: []channel{{gain: 1, rumble: -34, hum: -46, hiss: -54, dc: 0.015}},
		quiet:    span{99600, 115200},
	},
	{
		// Two microphones 27 cm apart on the line to the gangway: 38 frames of
		// lag at 340 m/s. The second cable lies across the shore supply.
		path: "deck/slate_and_gangway.wav", rate: 48000, bits: 24, frames: 144000, peak: -6,
		strikes: []strike{
			{at: 24001, kind: "slate", level: 1},
			{at: 60013, kind: "knock", level: 0.8},
			{at: 71011, kind: "knock", level: 0.5},
			{at: 103007, kind: "knock", level: 0.9},
		},
		channels: []channel{
			{gain: 1, rumble: -36, hiss: -68, water: -56},
			{lag: 38, gain: 0.85, rumble: -36, hum: -48, hiss: -68, water: -56},
		},
		quiet: span{1000, 23500},
	},
	{
		path: "deck/crossing_bell.wav", rate: 48000, bits: 24, frames: 120000, peak: -6,
		strikes: []strike{
			{at: 24007, kind: "bell", level: 1},
			{at: 67003, kind: "bell", level: 0.8},
		},
		channels: []channel{{gain: 1, rumble: -38, hum: -44, hiss: -62, water: -60}},
		quiet:    span{1000, 23500},
	},
}
