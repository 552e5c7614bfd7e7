package capture

import (
	"fmt"
	"io"
	"math"

	"fettle/audio"
)

// read keeps the whole capture, a plane a channel.
func read(src audio.Source) ([][]float64, error) {
	channels := src.Format().NumChannels
	if channels < 1 {
		return nil, fmt.Errorf("the capture has %d channels", channels)
	}
	planes := make([][]float64, channels)
	for buf := make([]float64, 8192*channels); ; {
		n, err := src.ReadFrames(buf)
		if err == io.EOF {
			return planes, nil
		}
		if err != nil {
			return nil, err
		}
		if (len(planes[0])+n)*channels > mostSamples {
			return nil, fmt.Errorf("the capture is longer than %d samples; cut it to the part with the probe", mostSamples)
		}
		for c := range planes {
			for i := range n {
				planes[c] = append(planes[c], buf[i*channels+c])
			}
		}
	}
}

// clipped tells whether a capture's peaks are cut off: whether it stays at one value at
// full scale for three samples, or stands at its very top much more often than just
// below. A sine is within 0.1 % of its peak 2.8 % of the time and from there to 10 %
// below it 25.9 %, a ratio of 0.11; cut off at 0.98 of its peak it has 0.6.
func clipped(y []float64) bool {
	var peak, last float64
	for _, v := range y {
		peak = max(peak, math.Abs(v))
	}
	if peak == 0 {
		return false
	}
	top, below, run := 0, 0, 0
	for _, v := range y {
		if v != last {
			run = 0
		}
		last = v
		a := math.Abs(v)
		if run++; run == 3 && a >= fullScale {
			return true
		}
		if a >= 0.999*peak {
			top++
		} else if a >= 0.9*peak {
			below++
		}
	}
	return top >= 100 && float64(top) > 0.3*float64(below)
}

// fullScale is one step of 16 bits below 1.0.
const fullScale = 1 - 1.0/32768
