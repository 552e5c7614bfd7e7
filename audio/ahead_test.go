package audio

import (
	"errors"
	"io"
	"slices"
	"testing"

	goaudio "github.com/go-audio/audio"
)

// counting is a stream of the numbers 0, 1, 2 and so on that ends with an error.
type counting struct {
	channels, frames, given int
	end                     error
	reads                   int
}

var formats = [...]*goaudio.Format{1: {SampleRate: 8000, NumChannels: 1}, 2: {SampleRate: 8000, NumChannels: 2}, 3: {SampleRate: 8000, NumChannels: 3}}

func (c *counting) Format() *goaudio.Format { return formats[c.channels] }
func (c *counting) Frames() int64           { return int64(c.frames) }

func (c *counting) ReadFrames(dst []float64) (int, error) {
	c.reads++
	n := min(len(dst)/c.channels, c.frames-c.given, 1+c.reads%5)
	if n == 0 {
		return 0, c.end
	}
	for i := range n * c.channels {
		dst[i] = float64(c.given*c.channels + i)
	}
	c.given += n
	return n, nil
}

// TestAheadGivesTheSame, in calls of any size, then the source's own end.
func TestAheadGivesTheSame(t *testing.T) {
	broken := errors.New("broken")
	for _, end := range []error{io.EOF, broken} {
		for _, channels := range []int{1, 2, 3} {
			for _, frames := range []int{0, 1, 1000} {
				a := NewAhead(&counting{channels: channels, frames: frames, end: end}, 7, 3)
				if a.Format().NumChannels != channels || a.Frames() != int64(frames) {
					t.Errorf("format %v, %d frames", a.Format(), a.Frames())
				}
				var got []float64
				for call := 1; ; call++ {
					buf := make([]float64, channels*(1+call%9))
					n, err := a.ReadFrames(buf)
					got = append(got, buf[:n*channels]...)
					if err != nil {
						if err != end || n != 0 {
							t.Errorf("ends with %d frames and %v, want %v", n, err, end)
						}
						break
					}
				}
				if _, err := a.ReadFrames(make([]float64, channels)); err != end {
					t.Errorf("after the end: %v", err)
				}
				a.Close()
				want := make([]float64, frames*channels)
				for i := range want {
					want[i] = float64(i)
				}
				if !slices.Equal(got, want) {
					t.Errorf("%d channels, %d frames: %d samples differ from the source's", channels, frames, len(got))
				}
			}
		}
	}
}

// TestAheadStops wherever it stands, and leaves the source alone from then on.
func TestAheadStops(t *testing.T) {
	for read := range 20 {
		src := &counting{channels: 1, frames: 1 << 30, end: io.EOF}
		a := NewAhead(src, 4, 2)
		for range read {
			if _, err := a.ReadFrames(make([]float64, 3)); err != nil {
				t.Fatal(err)
			}
		}
		a.Close()
		a.Close()
		given := src.given
		for {
			if _, err := a.ReadFrames(make([]float64, 3)); err != nil {
				break // what was ready are given first
			}
		}
		if src.given != given {
			t.Error("the source was read after Close")
		}
	}
}

func TestAheadDoesNotAllocate(t *testing.T) {
	a := NewAhead(&counting{channels: 2, frames: 1 << 30, end: io.EOF}, 64, 2)
	defer a.Close()
	buf := make([]float64, 200)
	if n := testing.AllocsPerRun(100, func() { a.ReadFrames(buf) }); n != 0 {
		t.Errorf("%g allocations a call", n)
	}
}
