package onsets

import "fmt"

// Report is what a treatment did to the onsets of a recording.
type Report struct {
	Rate     int   // Hz
	Frames   int64 // of either recording
	Channels []*Channel
	// Strongest are the strongest onsets, as Options ask.
	Strongest []Onset
}

// Channel is one channel's onsets. Times are seconds, levels dB.
type Channel struct {
	Channel int // from 1
	// Onsets is how many clear ones the original has; Unclear how many detections
	// were none, Weak how many were under -80 dB.
	Onsets, Unclear, Weak int
	// Lost is how many onsets the processed recording does not show within 20 ms,
	// Blurred how many are not clear there.
	Lost, Blurred int
	// Rise is that of the original; Shift and RiseChange are what became of it.
	Shift, Rise, RiseChange Summary
	// Early is the energy more than EarlyTimes before the onsets, re theirs; Floor
	// the levels under which none is seen.
	Early [len(EarlyTimes)]Summary
	Floor Summary
	// NotStated has a reason for what is NaN, under keys such as "shift",
	// "rise_change.percentile_95" and "early_5ms.median". A key without a part
	// speaks for all of a figure.
	NotStated map[string]string
}

// reportTally gathers the onsets of one processed recording.
type reportTally struct {
	channels  []*channelTally
	strongest *ranking
}

func newReportTally(channels int, o Options) *reportTally {
	t := &reportTally{strongest: newRanking(o.Strongest, o.Apart, channels)}
	for range channels {
		t.channels = append(t.channels, newChannelTally())
	}
	return t
}

func (t *reportTally) add(o Onset) {
	t.channels[o.Channel-1].add(o)
	t.strongest.add(o)
}

// report is that of processed recording i.
func (t *reportTally) report(tracks []*track, i int) *Report {
	r := &Report{Strongest: t.strongest.list()}
	for c, from := range tracks {
		r.Channels = append(r.Channels, t.channels[c].report(from, i))
	}
	return r
}

// channelTally gathers one channel's onsets.
type channelTally struct {
	shift, rise, riseChange, floor *tally
	early                          [len(EarlyTimes)]*tally
}

func newChannelTally() *channelTally {
	t := &channelTally{shift: newTally(false), rise: newTally(false), riseChange: newTally(false), floor: newTally(true)}
	for i := range t.early {
		t.early[i] = newTally(true)
	}
	return t
}

func (t *channelTally) add(o Onset) {
	t.shift.add(o.Shift, o.Time)
	t.rise.add(o.Rise, o.Time)
	t.riseChange.add(o.RiseChange, o.Time)
	t.floor.add(o.Floor, o.Time)
	for i, e := range t.early {
		e.add(o.Early[i], o.Time)
	}
}

// report is that of processed recording i.
func (t *channelTally) report(from *track, i int) *Channel {
	c := &Channel{
		Channel: from.channel, Onsets: from.onsets, Unclear: from.unclear, Weak: from.weak,
		Lost: from.outcomes[i].lost, Blurred: from.outcomes[i].blurred,
		Shift: t.shift.summary(), Rise: t.rise.summary(), RiseChange: t.riseChange.summary(),
		Floor: t.floor.summary(), NotStated: map[string]string{},
	}
	const turns = "the envelopes of all onsets turn back on the way to their peaks"
	c.explain("shift", c.Shift, "none of the onsets is clear in the processed recording")
	c.explain("rise", c.Rise, turns)
	c.explain("rise_change", c.RiseChange, turns+", or are not clear in the processed recording")
	const hidden = "what stands before the onsets would hide it, or is too short"
	c.explain("early_floor", c.Floor, hidden)
	for i, e := range t.early {
		c.Early[i] = e.summary()
		c.explain(fmt.Sprintf("early_%gms", 1e3*EarlyTimes[i]), c.Early[i], hidden)
	}
	return c
}

// explain gives the reasons for what a summary does not state; none is that for
// having no value though there are onsets.
func (c *Channel) explain(key string, s Summary, none string) {
	switch {
	case c.Onsets == 0:
		c.NotStated[key] = "no onset in the recording is clear"
	case s.Count == 0:
		c.NotStated[key] = none
	default:
		if s.Count < leastMedian {
			c.NotStated[key+".median"] = fewer(s.Count, leastMedian)
		}
		if s.Count < leastPercentile {
			c.NotStated[key+".percentile_95"] = fewer(s.Count, leastPercentile)
		}
	}
}

func fewer(count, least int) string {
	return fmt.Sprintf("it can be told of %d onsets only, %d are needed", count, least)
}
