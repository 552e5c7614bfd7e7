package hear

import (
	"fmt"

	"fettle/audio"
)

// cuts are the same frames of a recording and of what each way makes of it,
// interleaved.
type cuts struct {
	channels int
	original []float64
	outputs  [][]float64
}

// render reads the frames from to to of a recording, and as many on either side as
// any way remembers, and filters them.
func render(rec Recording, from, to int64, ways []Way) (*cuts, error) {
	format := rec.Format()
	channels := int64(format.NumChannels)
	c := &cuts{channels: format.NumChannels}
	around := memory(ways)
	first, end := max(0, from-around), min(rec.Frames(), to+around)
	if err := rec.SeekFrame(first); err != nil {
		return nil, err
	}
	input := make([]float64, (end-first)*channels)
	if err := readAll(rec, input); err != nil {
		return nil, err
	}
	c.original = input[(from-first)*channels : (to-first)*channels]
	for _, w := range ways {
		out, err := w.Filter.ApplyWith(audio.FromFrames(format, input), w.Setup)
		if err != nil {
			return nil, fmt.Errorf("%s: %w", w.Label, err)
		}
		whole := make([]float64, (to-first)*channels)
		if err := readAll(out, whole); err != nil {
			return nil, fmt.Errorf("%s: %w", w.Label, err)
		}
		c.outputs = append(c.outputs, whole[(from-first)*channels:])
	}
	return c, nil
}

// memory is how many frames before or after a frame matter to what any way makes of it.
// The larger serves on both sides: where a recording is mirrored at one of its ends, what
// is mirrored has then been read.
func memory(ways []Way) int64 {
	most := 0
	for _, w := range ways {
		for _, p := range w.Filter.Paths() {
			ahead, behind := w.Filter.Reach(p)
			most = max(most, ahead, behind)
		}
	}
	return int64(most)
}

// picked are some channels, from 1, of interleaved frames.
func picked(frames []float64, channels int, which []int) []float64 {
	if len(which) == channels {
		return frames
	}
	out := make([]float64, 0, len(frames)/channels*len(which))
	for ; len(frames) > 0; frames = frames[channels:] {
		for _, c := range which {
			out = append(out, frames[c-1])
		}
	}
	return out
}

func less(x, y []float64) []float64 {
	out := make([]float64, len(x))
	for i, v := range x {
		out[i] = v - y[i]
	}
	return out
}

func scaled(x []float64, by float64) []float64 {
	out := make([]float64, len(x))
	for i, v := range x {
		out[i] = by * v
	}
	return out
}
