package batch

import "fettle/audio"

// span is a part of a stream that goes by.
type span struct{ skip, length int64 } // frames before it, and of it

// take tells which of the next frames belong to the span.
func (s *span) take(frames int) (from, to int) {
	n := int64(frames)
	before := min(s.skip, n)
	end := min(before+s.length, n)
	s.skip -= before
	s.length -= end - before
	return int(before), int(end)
}

// metered measures what is read through it, as far as it is in the span, and tells how
// far it is.
type metered struct {
	audio.Source
	meter      *audio.Meter
	span       span
	progress   Progress
	frameBytes int64
}

func (m *metered) ReadFrames(dst []float64) (int, error) {
	n, err := m.Source.ReadFrames(dst)
	if err != nil {
		return n, err
	}
	if m.progress != nil {
		m.progress.Bytes(int64(n) * m.frameBytes)
	}
	from, to := m.span.take(n)
	channels := m.Format().NumChannels
	m.meter.Add(dst[from*channels : to*channels])
	return n, nil
}
