package hear

import (
	"cmp"
	"errors"
	"fmt"
	"math"
	"strings"

	"fettle/audio"
	"fettle/audit/onsets"
	"fettle/filter"
)

// Recording is what excerpts are taken of; an [audio.Recording] is one.
type Recording interface {
	audio.Source
	// SeekFrame makes a frame the next one to be read.
	SeekFrame(frame int64) error
}

var _ Recording = (*audio.Recording)(nil)

// Way is one realisation to be heard.
type Way struct {
	Label  string
	Filter *filter.Filter // realised at the recording's rate
	Setup  filter.Setup
	// Lead is how early the filter rings, in seconds (figures.Figures.Lead): so much
	// is shown ahead of the onset. NaN: not known.
	Lead float64
}

// Options say what excerpts to take.
type Options struct {
	// Name is the recording's, as it shall be shown; "": the recording.
	Name string
	// Onset is what they are about; nil: the strongest is looked for, which reads the
	// recording once.
	Onset *onsets.Onset
	// Bytes is how long all players together may be in a page, as base64.
	Bytes int
}

// Excerpts are what can be heard of one recording about one instant.
type Excerpts struct {
	Name     string
	Rate     int   // Hz, of the players
	Channels []int // of the recording, from 1, that are played
	// Start is where in the recording the excerpts begin, Length how long they are
	// and At where the onset is, in seconds.
	Start, Length, At float64
	// Channel has the onset. Clear tells that it is one; else it is the
	// recording's largest sample.
	Channel int
	Clear   bool
	// Alone tells that of more than two channels the onset's alone is played.
	Alone bool
	// Limited tells that the excerpts would be longer if there were room.
	Limited bool
	// Attenuation is by how many dB all players are lowered, 0 or more.
	Attenuation float64
	Original    []byte // a WAV file
	Outputs     []Output
	// LeftOut are the labels of ways for which there was no room.
	LeftOut []string
	Zoom    Zoom
}

// Output is one realisation's.
type Output struct {
	Label string
	WAV   []byte
	// Gain is what brings the output to the original's loudness, in dB, Match how
	// that was found. Attenuation comes on top.
	Gain  float64
	Match Match
	// Ratio is what the player's samples are multiplied by to be subtracted from the
	// original's.
	Ratio float64
	// Removed is the level of what was removed re that of the original's excerpt,
	// K-weighted, in dB; -Inf: nothing was removed.
	Removed float64
}

// Match is how an output was brought to the original's level.
type Match int

const (
	// ByLoudness is by loudness over the blocks that pass the gates in both.
	ByLoudness Match = iota
	// ByEnergy is by K-weighted energy without gates: there are no such blocks, the
	// excerpt being too short or too faint.
	ByEnergy
	// Unmatched is as it came out: one of the two is silent.
	Unmatched
)

// ErrNoRoom is that of Take when not even half a second of one realisation fits.
var ErrNoRoom = errors.New("the page is full of tables and plots and has no room for players; compare fewer realisations at a time")

// Take takes excerpts of a recording, which it reads and does not close. Errors are of
// reading, say why the recording and a filter do not go together, or are ErrNoRoom.
func Take(rec Recording, ways []Way, o Options) (*Excerpts, error) {
	if rec.Frames() == 0 {
		return nil, errors.New("there is nothing to hear in a recording without frames; name another")
	}
	at, clear, err := place(rec, o.Onset)
	if err != nil {
		return nil, err
	}
	s, ok := newSpan(rec, at, len(ways), o.Bytes)
	if !ok {
		return nil, ErrNoRoom
	}
	e := &Excerpts{
		Name: cmp.Or(o.Name, "the recording"), Rate: s.rate, Channels: s.channels, At: at.Time, Channel: at.Channel, Clear: clear,
		Alone: len(s.channels) < rec.Format().NumChannels, Limited: s.limited,
		Start: float64(s.from) / float64(s.recorded), Length: float64(s.frames) / float64(s.recorded),
	}
	for _, w := range ways[s.ways:] {
		e.LeftOut = append(e.LeftOut, w.Label)
	}
	ways = ways[:s.ways]
	c, err := render(rec, s.from, s.from+s.frames, ways)
	if err != nil {
		return nil, err
	}
	e.Zoom = newZoom(c, s, at, ways)
	players, peaks, err := e.match(c, s, ways)
	if err != nil {
		return nil, err
	}
	return e, e.encode(players, peaks, s, ways)
}

// match enters the outputs' levels. It gives the players' frames, the original's first,
// and the peaks of what was removed.
func (e *Excerpts) match(c *cuts, s span, ways []Way) (players [][]float64, peaks []*audio.Meter, err error) {
	original := picked(c.original, c.channels, s.channels)
	reference, err := meterOf(original, s)
	if err != nil {
		return nil, nil, err
	}
	players = append(players, scaled(original, 1))
	for i, w := range ways {
		output := picked(c.outputs[i], c.channels, s.channels)
		removed := less(original, output)
		own, err := meterOf(output, s)
		if err != nil {
			return nil, nil, err
		}
		taken, err := meterOf(removed, s)
		if err != nil {
			return nil, nil, err
		}
		o := Output{Label: w.Label, Removed: taken.Ungated() - reference.Ungated()}
		if math.IsInf(taken.Ungated(), -1) { // of silence, too
			o.Removed = math.Inf(-1)
		}
		o.Gain, o.Match = over(reference, own)
		o.Ratio = fromDB(-o.Gain)
		e.Outputs = append(e.Outputs, o)
		players = append(players, scaled(output, fromDB(o.Gain)))
		peaks = append(peaks, peakOf(removed, len(s.channels)))
	}
	return players, peaks, nil
}

// encode makes files of the players' frames, lowered so that none of them nor what has
// other peaks exceeds the ceiling.
func (e *Excerpts) encode(players [][]float64, peaks []*audio.Meter, s span, ways []Way) error {
	players, err := resampled(players, s)
	if err != nil {
		return err
	}
	for _, p := range players {
		faded(p, len(s.channels), s.rate)
		peaks = append(peaks, peakOf(p, len(s.channels)))
	}
	e.Attenuation = attenuation(peaks)
	gain := fromDB(-e.Attenuation)
	if e.Original, err = encode(scaled(players[0], gain), s, [32]byte{}, "original"); err != nil {
		return err
	}
	for i, w := range ways {
		if e.Outputs[i].WAV, err = encode(scaled(players[1+i], gain), s, w.Filter.Chain().SHA256, w.Label); err != nil {
			return err
		}
	}
	return nil
}

// Where says in words what the excerpts are of.
func (e *Excerpts) Where() string {
	what := fmt.Sprintf("The onset at %.3f s is the strongest of %s", e.At, e.Name)
	if !e.Clear {
		what = fmt.Sprintf("No onset of %s is clear; it is loudest at %.3f s", e.Name, e.At)
	}
	text := fmt.Sprintf("%s, on channel %d. Each player has the %.2f s from %.3f s on", what, e.Channel, e.Length, e.Start)
	if e.Limited {
		text += ", no more so that the page stays small"
	}
	if len(e.LeftOut) > 0 {
		text += fmt.Sprintf("; there was no room for %s", strings.Join(e.LeftOut, ", "))
	}
	text += "."
	if e.Alone {
		text += " That channel alone is played."
	}
	if float64(e.Rate) != e.Zoom.Rate {
		text += fmt.Sprintf(" Players have %g kHz for want of room, the recording has %g.", float64(e.Rate)/1000, e.Zoom.Rate/1000)
	}
	return text
}
