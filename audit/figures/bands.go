package figures

import (
	"math"

	"fettle/filter/response"
)

// Band is a one-third-octave band; frequencies in Hz.
type Band struct {
	Nominal      float64 // the preferred number it is called by, ISO 266: 31.5, 63, 1000
	Centre       float64 // exact, base ten: 31.6228, 63.0957, 1000
	Lower, Upper float64 // Centre times 10^(-1/20) and 10^(+1/20)
}

// preferred is the R10 series of ISO 266 within one decade.
var preferred = [10]float64{1, 1.25, 1.6, 2, 2.5, 3.15, 4, 5, 6.3, 8}

// lowestBand is the index n of the band called 20 Hz, whose centre is 10^(n/10) Hz.
const lowestBand = 13

// Bands lists the one-third-octave bands of a sample rate in Hz: from 20 Hz to the
// last whose upper edge is at most 0.45 of the rate. It is empty when not even
// the 20 Hz band fits. Source: IEC 61260-1:2014, base-ten exact mid-band
// frequencies and edges; nominal numbers from ISO 266.
func Bands(rate float64) []Band {
	var bands []Band
	for n := lowestBand; ; n++ {
		b := band(n)
		if !(b.Upper <= response.TopOfBand*rate) {
			return bands
		}
		bands = append(bands, b)
	}
}

func band(n int) Band {
	x := float64(n)
	return Band{
		Nominal: preferred[n%10] * math.Pow(10, float64(n/10)),
		Centre:  math.Pow(10, x/10),
		Lower:   math.Pow(10, (x-0.5)/10),
		Upper:   math.Pow(10, (x+0.5)/10),
	}
}

// width is the band's width in Hz.
func (b Band) width() float64 { return b.Upper - b.Lower }
