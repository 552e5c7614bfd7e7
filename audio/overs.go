package audio

import (
	"fmt"
	"math"
)

// OverError says that an output was not written because samples exceed what
// its integer format can hold.
type OverError struct {
	Path       string
	Peak       float64 // dBFS, of the largest sample beyond the range
	HeadroomDB float64 // attenuation that the recording needs, not rounded
	Count      int64   // samples beyond the range
	Frame      int64   // of the first, from 0
	Channel    int     // of the first, from 0
}

func (e *OverError) Error() string {
	need := math.Ceil(e.HeadroomDB*10) / 10
	return fmt.Sprintf("%s: %d samples exceed full scale, the first at frame %d, channel %d, the largest at %+.2f dBFS; "+
		"nothing was written, %.1f dB of headroom are needed: use --headroom \"%.1f dB\" to lower all recordings alike, "+
		"--headroom fit to lower this one by what it needs, or --format float32",
		e.Path, e.Count, e.Frame, e.Channel+1, e.Peak, need, need)
}

// DB is 20 log10 x: the level of an amplitude, in dB. Silence, 0, is at -Inf.
func DB(x float64) float64 { return 20 * math.Log10(x) }
