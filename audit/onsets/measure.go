package onsets

import (
	"errors"
	"fmt"
	"io"

	"fettle/audio"
)

const (
	// chunkSeconds is how much is read at a time.
	chunkSeconds = 0.1
	// leastRate is the lowest rate in Hz at which an envelope of 2 ms means anything.
	leastRate = 4000
)

// Options say what else Measure lists.
type Options struct {
	// Strongest is how many of the strongest onsets to list, Apart how many seconds
	// apart at least; see Strongest.
	Strongest int
	Apart     float64
}

// Measure compares the onsets of an original with those of an aligned processed
// recording of the same rate, channels and length. It reads both once, in step,
// and closes neither. Errors are of reading, or say that the two do not go
// together; what the recordings do not show is in the Report.
func Measure(original, processed audio.Source, o Options) (*Report, error) {
	reports, err := MeasureEach(original, []audio.Source{processed}, o)
	if err != nil {
		return nil, err
	}
	return reports[0], nil
}

// MeasureEach is Measure of several processed recordings of one original, whose onsets
// are found once. The reports are in the order of the recordings.
func MeasureEach(original audio.Source, processed []audio.Source, o Options) ([]*Report, error) {
	tallies := make([]*reportTally, len(processed))
	for i, p := range processed {
		a, b := original.Format(), p.Format()
		if a.SampleRate != b.SampleRate || a.NumChannels != b.NumChannels {
			return nil, fmt.Errorf("the original has %d channel(s) at %d Hz, the processed recording %d at %d Hz; compare recordings of the same rate and channels",
				a.NumChannels, a.SampleRate, b.NumChannels, b.SampleRate)
		}
		tallies[i] = newReportTally(a.NumChannels, o)
	}
	tracks, frames, err := follow(original, processed, func(i int, o Onset) { tallies[i].add(o) })
	if err != nil {
		return nil, err
	}
	var reports []*Report
	for i, t := range tallies {
		r := t.report(tracks, i)
		r.Rate, r.Frames = original.Format().SampleRate, frames
		reports = append(reports, r)
	}
	return reports, nil
}

// Detect gives the onsets of a recording to found, each channel's in order of time,
// some tenths of a second after they were read. It reads the recording to
// its end.
func Detect(src audio.Source, found func(Onset)) error {
	_, _, err := follow(src, nil, func(_ int, o Onset) { found(o) })
	return err
}

// Strongest lists the onsets of a recording with the highest peaks, the strongest
// first: at most so many, and no two within apart seconds, whatever their channels.
func Strongest(src audio.Source, count int, apart float64) ([]Onset, error) {
	strongest := newRanking(count, apart, src.Format().NumChannels)
	if err := Detect(src, strongest.add); err != nil {
		return nil, err
	}
	return strongest.list(), nil
}

// follow reads an original and processed recordings in step to the end, and gives every
// onset to found.
func follow(original audio.Source, processed []audio.Source, found finder) (tracks []*track, frames int64, err error) {
	format := original.Format()
	if format.SampleRate < leastRate {
		return nil, 0, fmt.Errorf("onsets cannot be timed at %d Hz; use a recording of at least %d Hz", format.SampleRate, leastRate)
	}
	for c := range format.NumChannels {
		tracks = append(tracks, newTrack(c+1, float64(format.SampleRate), len(processed), found))
	}
	buffer := make([]float64, int(chunkSeconds*float64(format.SampleRate))*format.NumChannels)
	for end := false; !end; {
		n, err := fill(original, buffer)
		if err != nil {
			return nil, 0, fmt.Errorf("reading the original: %w", err)
		}
		end = n < len(buffer)
		for c, t := range tracks {
			t.original.append(buffer[:n], c, len(tracks))
		}
		for i, p := range processed {
			if err := alongside(p, i, tracks, buffer, n); err != nil {
				return nil, 0, err
			}
		}
		frames += int64(n / len(tracks))
		for _, t := range tracks {
			t.advance(end)
		}
	}
	return tracks, frames, nil
}

// alongside reads as many samples of processed recording i as there were of the original.
func alongside(processed audio.Source, i int, tracks []*track, buffer []float64, n int) error {
	got, err := fill(processed, buffer)
	if err != nil {
		return fmt.Errorf("reading the processed recording: %w", err)
	}
	if got != n {
		longer, shorter := "original", "processed recording"
		if got > n {
			longer, shorter = shorter, longer
		}
		return fmt.Errorf("the %s is longer than the %s; compare an aligned recording of the same length", longer, shorter)
	}
	for c, t := range tracks {
		t.outcomes[i].processed.append(buffer[:n], c, len(tracks))
	}
	return nil
}

// fill reads frames until dst is full or the source ends, and returns how many
// samples that are.
func fill(src audio.Source, dst []float64) (int, error) {
	n, err := audio.ReadFull(src, dst)
	if errors.Is(err, io.ErrUnexpectedEOF) {
		err = nil
	}
	return n, err
}
