package onsets

import "math"

const (
	// judged is how much after a detection must be there before it is judged.
	judged = near + together + 3*attackEnds + 2*reach + smoothing
	// kept is how much of a signal is kept at least: it must hold what early energy
	// is read from when the picker, a chunk of reading and judging have passed.
	kept = 0.8
)

// track follows one channel of an original and, unless that is nil, of what was
// made of it.
type track struct {
	channel             int // from 1
	rate                float64
	original, processed *signal
	x, y                envelope // of what is being judged
	flux                *flux
	picker              picker
	fluxes              int64     // values of the detection function so far
	detections          []float64 // times, not judged yet
	last                float64   // time of the last onset
	onsets              int
	unclear, weak       int
	lost, blurred       int
	found               func(Onset)
}

func newTrack(channel int, rate float64, compared bool, found func(Onset)) *track {
	t := &track{
		channel: channel, rate: rate, original: newSignal(rate), flux: newFlux(rate),
		last: math.Inf(-1), found: found,
	}
	if compared {
		t.processed = newSignal(rate)
	}
	return t
}

// advance looks at what was appended to the signals; at the end of the recording
// it judges what is left.
func (t *track) advance(end bool) {
	for t.next()+int64(len(t.flux.frame)) <= t.original.end() {
		t.original.copyTo(t.flux.frame, t.next())
		t.pick(t.flux.next())
	}
	if end {
		for range pickAfter {
			t.pick(0)
		}
	}
	now := float64(t.original.end()) / t.rate
	for len(t.detections) > 0 && (end || t.detections[0]+judged <= now) {
		t.judge(t.detections[0])
		t.detections = t.detections[1:]
	}
	for _, s := range []*signal{t.original, t.processed} {
		if s != nil {
			s.keep(int(kept * t.rate))
		}
	}
}

// next is the first sample of the detection function's next frame. No frame reaches
// out of the recording: its ends are no onsets.
func (t *track) next() int64 { return t.fluxes * int64(t.flux.hop) }

// pick gives a value of the detection function to the picker.
func (t *track) pick(flux float64) {
	if t.picker.push(flux) {
		middle := t.next() - pickAfter*int64(t.flux.hop) + int64(len(t.flux.frame)/2)
		t.detections = append(t.detections, float64(middle)/t.rate)
	}
	t.fluxes++
}

// judge measures the onset about a detection, if it is one.
func (t *track) judge(detected float64) {
	t.original.readInto(&t.x, detected-near-2*quiet-together-smoothing, detected+near+2*attackEnds+together+smoothing)
	a, ok := t.x.clearAttack(detected, t.last+quiet)
	switch {
	case !ok:
		t.unclear++
	case a.peak < leastPeak:
		t.weak++
	default:
		t.onsets++
		o := newOnset(t.channel, &t.x, a)
		t.last = o.Time
		if t.processed != nil {
			t.compare(&o, a)
		}
		t.found(o)
	}
}

// compare measures an onset in the processed recording.
func (t *track) compare(o *Onset, a attack) {
	t.processed.readInto(&t.y, a.from-2*quiet-together-2*reach-smoothing, a.from+2*attackEnds+2*reach+smoothing)
	b, lag, found := t.answer(a)
	switch {
	case !found:
		t.lost++
	case !t.y.isClear(b) || math.Abs(b.onset-a.onset) > reach:
		t.blurred++
	default:
		lag = b.onset - a.onset
		o.Shift, o.RiseChange = lag, t.y.rise(b)-o.Rise
	}
	before, there := t.original.earlyAt(o.Time)
	after, too := t.processed.earlyAt(o.Time + lag)
	if there && too {
		o.setEarly(before, after)
	}
}

// answer finds what answers an attack in the processed recording, and about how much
// later that is: what stands in the same place, unless something very much larger
// is near; then correlation finds it. A voice, whose pulses are alike, would
// correlate with itself a pulse later.
func (t *track) answer(a attack) (b attack, lag float64, found bool) {
	b, found = t.y.answer(a, a.from)
	if found && b.peak >= aside*t.y.most(a.from-reach, a.from+a.long+reach) {
		return b, 0, true
	}
	lag = t.x.lagTo(&t.y, a)
	if far, ok := t.y.answer(a, a.from+lag); ok {
		return far, lag, true
	}
	return b, 0, found
}
