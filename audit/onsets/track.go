package onsets

import "math"

const (
	// judged is how much after a detection must be there before it is judged.
	judged = near + together + 3*attackEnds + 2*reach + smoothing
	// kept is how much of a signal is kept at least: it must hold what early energy
	// is read from when the picker, a chunk of reading and judging have passed.
	kept = 0.8
)

// track follows one channel of an original and of all that was made of it.
type track struct {
	channel       int // from 1
	rate          float64
	original      *signal
	outcomes      []*outcome
	x             envelope // of what is being judged
	flux          *flux
	picker        picker
	fluxes        int64     // values of the detection function so far
	detections    []float64 // times, not judged yet
	last          float64   // time of the last onset
	onsets        int
	unclear, weak int
	found         finder
}

// outcome follows the channel in one processed recording.
type outcome struct {
	processed     *signal
	y             envelope
	lost, blurred int
}

// finder takes an onset as it is in processed recording i, from 0; once with i 0 where there
// is none.
type finder func(i int, o Onset)

func newTrack(channel int, rate float64, processed int, found finder) *track {
	t := &track{
		channel: channel, rate: rate, original: newSignal(rate), flux: newFlux(rate),
		last: math.Inf(-1), found: found,
	}
	for range processed {
		t.outcomes = append(t.outcomes, &outcome{processed: newSignal(rate)})
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
	t.original.keep(int(kept * t.rate))
	for _, p := range t.outcomes {
		p.processed.keep(int(kept * t.rate))
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
		if len(t.outcomes) == 0 {
			t.found(0, o)
		}
		for i, p := range t.outcomes {
			t.found(i, t.compared(p, o, a))
		}
	}
}

// compared is an onset as it is in a processed recording.
func (t *track) compared(p *outcome, o Onset, a attack) Onset {
	p.processed.readInto(&p.y, a.from-2*quiet-together-2*reach-smoothing, a.from+2*attackEnds+2*reach+smoothing)
	b, lag, found := t.answer(p, a)
	switch {
	case !found:
		p.lost++
	case !p.y.isClear(b) || math.Abs(b.onset-a.onset) > reach:
		p.blurred++
	default:
		lag = b.onset - a.onset
		o.Shift, o.RiseChange = lag, p.y.rise(b)-o.Rise
	}
	before, there := t.original.earlyAt(o.Time)
	after, too := p.processed.earlyAt(o.Time + lag)
	if there && too {
		o.setEarly(before, after)
	}
	return o
}

// answer finds what answers an attack in a processed recording, and about how much
// later that is: what stands in the same place, unless something very much larger
// is near; then correlation finds it. A voice, whose pulses are alike, would
// correlate with itself a pulse later.
func (t *track) answer(p *outcome, a attack) (b attack, lag float64, found bool) {
	b, found = p.y.answer(a, a.from)
	if found && b.peak >= aside*p.y.most(a.from-reach, a.from+a.long+reach) {
		return b, 0, true
	}
	lag = t.x.lagTo(&p.y, a)
	if far, ok := p.y.answer(a, a.from+lag); ok {
		return far, lag, true
	}
	return b, 0, found
}
