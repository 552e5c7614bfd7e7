package hear

import (
	"math"

	"fettle/audit/onsets"
)

const (
	mostSeconds  = 3.0
	goodSeconds  = 2.0 // if there is room for less, players have a lower rate
	leastSeconds = 0.5 // if there is room for less, there are fewer players
	// ahead is the share of an excerpt that stands before its onset.
	ahead = 0.4
	// leastRate is the lowest rate in Hz that players are brought down to: all that is
	// heard is under half of it.
	leastRate = 44100
	// around is what a player takes in a page beside its file, in bytes, and header what
	// stands before the samples in that.
	around, header = 1000, 80
)

// span is what of a recording is heard and how.
type span struct {
	from, frames int64 // of the recording
	recorded     int   // its rate in Hz
	rate         int   // of the players, recorded or a whole fraction of it
	channels     []int // that are heard, from 1
	ways         int   // that are heard, the first
	limited      bool  // by room
}

// newSpan puts an onset and so many ways into so many bytes; false where even one is too
// many.
func newSpan(rec Recording, at onsets.Onset, ways, bytes int) (span, bool) {
	format := rec.Format()
	s := span{recorded: format.SampleRate, rate: format.SampleRate, channels: heard(format.NumChannels, at.Channel), ways: ways}
	if s.room(bytes) < s.count(goodSeconds) {
		s.rate = lowered(s.recorded)
	}
	least, most := min(s.count(leastSeconds), rec.Frames()), min(s.count(mostSeconds), rec.Frames())
	for s.ways > 1 && s.room(bytes) < least {
		s.ways--
	}
	s.frames = min(s.room(bytes), most)
	s.limited = s.frames < most
	onset := int64(math.Round(at.Time * float64(s.recorded)))
	s.from = min(max(0, onset-int64(ahead*float64(s.frames))), rec.Frames()-s.frames)
	return s, s.frames >= least
}

// heard are the channels that are played: both of two; of more, which no two
// loudspeakers can play, the onset's.
func heard(channels, onset int) []int {
	switch channels {
	case 1:
		return []int{1}
	case 2:
		return []int{1, 2}
	}
	return []int{onset}
}

// lowered is the lowest rate, a whole fraction of another, that holds all that is
// heard.
func lowered(rate int) int {
	for by := rate / leastRate; by > 1; by-- {
		if rate%by == 0 {
			return rate / by
		}
	}
	return rate
}

// count is how many frames of the recording some seconds are.
func (s span) count(seconds float64) int64 { return int64(seconds * float64(s.recorded)) }

// room is how many frames of the recording fit: the original and each way have a
// player.
func (s span) room(bytes int) int64 {
	each := (bytes/(1+s.ways) - around) / 4 * 3 // bytes in base64
	frames := int64(max(0, each-header) / (len(s.channels) * encoding.Bytes))
	return frames * int64(s.recorded/s.rate)
}
