package batch

import (
	"fmt"
	"io"
	"math"
	"path/filepath"
	"strconv"
	"strings"

	"fettle/audio"
	"fettle/filter"
)

// Stretch is the part of each recording that a trial renders, in seconds. The
// zero Stretch is all of it; To is infinite for the end.
type Stretch struct{ From, To float64 }

// ParseStretch reads where a stretch begins and ends, such as "1:20" and "1:50";
// "" stands for the beginning and the end of the recording.
func ParseStretch(from, to string) (Stretch, error) {
	s := Stretch{0, math.Inf(1)}
	if from == "" && to == "" {
		return Stretch{}, nil
	}
	var err error
	if from != "" {
		if s.From, err = parseTime(from); err != nil {
			return s, fmt.Errorf("--from: %w", err)
		}
	}
	if to != "" {
		if s.To, err = parseTime(to); err != nil {
			return s, fmt.Errorf("--to: %w", err)
		}
	}
	if !(s.To > s.From) {
		return s, fmt.Errorf("--to: %s is not after %g s, where the stretch begins", to, s.From)
	}
	return s, nil
}

// parseTime reads seconds, minutes and seconds, or hours, minutes and seconds,
// parted by colons.
func parseTime(text string) (float64, error) {
	parts := strings.Split(text, ":")
	total := 0.0
	for i, part := range parts {
		v, err := strconv.ParseFloat(part, 64)
		last := i == len(parts)-1
		if err != nil || len(parts) > 3 || !(v >= 0) || math.IsInf(v, 1) || i > 0 && v >= 60 || !last && v != math.Trunc(v) {
			return 0, fmt.Errorf("%q is no time; give one such as 1:20, 80 or 0:01:20.5", text)
		}
		total = 60*total + v
	}
	return total, nil
}

func (s Stretch) none() bool { return s == Stretch{} }

func (s Stretch) String() string {
	if s.none() {
		return ""
	}
	return fmt.Sprintf("%g s to %g s", s.From, s.To)
}

// rename marks an output as a trial.
func (s Stretch) rename(rel string) string {
	if s.none() {
		return rel
	}
	ext := filepath.Ext(rel)
	return strings.TrimSuffix(rel, ext) + ".trial" + ext
}

// frames gives the stretch in frames of a recording, at most its own length.
func (s Stretch) frames(rate int, length int64) (from, to int64, err error) {
	if s.none() {
		return 0, length, nil
	}
	from = int64(min(math.Round(s.From*float64(rate)), float64(length)))
	to = int64(min(math.Round(s.To*float64(rate)), float64(length)))
	if from >= to {
		return 0, 0, fmt.Errorf("holds nothing from %g s on; it is %.3f s long", s.From, float64(length)/float64(rate))
	}
	return from, to, nil
}

// section is frames from to to of a recording. It begins to read where it is
// made.
type section struct {
	*audio.Recording
	left, length int64
}

func newSection(r *audio.Recording, from, to int64) (*section, error) {
	return &section{r, to - from, to - from}, r.SeekFrame(from)
}

func (s *section) Frames() int64 { return s.length }

func (s *section) ReadFrames(dst []float64) (int, error) {
	if s.left == 0 {
		return 0, io.EOF
	}
	channels := int64(s.Format().NumChannels)
	n, err := s.Recording.ReadFrames(dst[:min(int64(len(dst)), s.left*channels)])
	s.left -= int64(n)
	return n, err
}

// reach is how many frames before and after an output frame matter to it.
func reach(f *filter.Filter) (before, after int64) {
	for _, p := range f.Paths() {
		ahead, behind := f.Reach(p)
		before, after = max(before, int64(behind)), max(after, int64(ahead))
	}
	return before, after
}
