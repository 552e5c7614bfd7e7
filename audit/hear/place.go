package hear

import (
	"errors"
	"fmt"
	"io"
	"math"

	"fettle/audio"
	"fettle/audit/onsets"
)

// place finds the onset that excerpts are about; clear is false where there is none
// and the largest sample stands for it.
func place(rec Recording, known *onsets.Onset) (at onsets.Onset, clear bool, err error) {
	format := rec.Format()
	if known != nil {
		if frame := math.Round(known.Time * float64(format.SampleRate)); !(frame >= 0 && frame < float64(rec.Frames())) || known.Channel < 1 || known.Channel > format.NumChannels {
			return at, false, fmt.Errorf("an onset at %g s on channel %d is not in this recording", known.Time, known.Channel)
		}
		return *known, true, nil
	}
	if err := rec.SeekFrame(0); err != nil {
		return at, false, err
	}
	w := &watched{Source: rec}
	strongest, err := onsets.Strongest(w, 1, 0)
	if err != nil {
		return at, false, err
	}
	if len(strongest) > 0 {
		return strongest[0], true, nil
	}
	return onsets.Onset{Channel: w.channel + 1, Time: float64(w.frame) / float64(format.SampleRate)}, false, nil
}

// watched remembers where in a source the largest sample is.
type watched struct {
	audio.Source
	read    int64
	largest float64
	frame   int64
	channel int // from 0
}

func (w *watched) ReadFrames(dst []float64) (int, error) {
	n, err := w.Source.ReadFrames(dst)
	channels := w.Format().NumChannels
	for i, v := range dst[:n*channels] {
		if v = math.Abs(v); v > w.largest {
			w.largest, w.frame, w.channel = v, w.read+int64(i/channels), i%channels
		}
	}
	w.read += int64(n)
	return n, err
}

// readAll reads frames until dst is full.
func readAll(src audio.Source, dst []float64) error {
	_, err := audio.ReadFull(src, dst)
	if errors.Is(err, io.ErrUnexpectedEOF) {
		return fmt.Errorf("the recording ends sooner than it says: %w; wait until nothing writes to it", err)
	}
	return err
}
