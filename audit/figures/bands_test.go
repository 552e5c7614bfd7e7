package figures

import (
	"encoding/csv"
	"math/cmplx"
	"os"
	"strconv"
	"testing"
)

func TestBandsAgainstIEC61260(t *testing.T) {
	rows := thirdOctaves(t)
	bands := Bands(rate48)
	for i, b := range bands {
		row := rows[i]
		within(t, "nominal", b.Nominal, row[0], 1e-9*row[0])
		// The table has six decimals.
		within(t, "centre", b.Centre, row[1], 0.6e-6)
		within(t, "lower edge", b.Lower, row[2], 0.6e-6)
		within(t, "upper edge", b.Upper, row[3], 0.6e-6)
	}
	// 0.45·48000 = 21600 lies between the upper edges of 16 kHz and 20 kHz.
	if last := bands[len(bands)-1].Nominal; last != 16000 {
		t.Errorf("last band at 48 kHz is %g Hz, want 16000", last)
	}
}

// thirdOctaves is the table from 20 Hz up: nominal, centre, lower and upper edge.
func thirdOctaves(t *testing.T) [][4]float64 {
	f, err := os.Open("testdata/third-octave.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	records, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var rows [][4]float64
	for _, r := range records[1:] {
		var row [4]float64
		for i := range row {
			if row[i], err = strconv.ParseFloat(r[i+1], 64); err != nil {
				t.Fatal(err)
			}
		}
		if row[0] >= 20 {
			rows = append(rows, row)
		}
	}
	if len(rows) != 31 {
		t.Fatalf("%d bands from 20 Hz to 20 kHz in the table, want 31", len(rows))
	}
	return rows
}

func TestBandsByRate(t *testing.T) {
	for _, c := range []struct {
		rate, last float64
		count      int
	}{{16000, 6300, 26}, {44100, 16000, 30}, {96000, 31500, 33}, {192000, 63000, 36}, {50, 20, 1}} {
		bands := Bands(c.rate)
		if n := len(bands); n != c.count || bands[n-1].Nominal != c.last {
			t.Errorf("%g Hz: %d bands, want %d up to %g: %v", c.rate, n, c.count, c.last, bands)
		}
	}
	if bands := Bands(44); len(bands) != 0 {
		t.Errorf("44 Hz: %v, want no band", bands)
	}
}

// A band-pass carries the bands it passes: 3 dB down at its corners, 20 dB down
// one octave out for order 4 (24 dB an octave).
func TestCarriedBands(t *testing.T) {
	s := newSpectrum(butterworth(4, 300, 3400, rate48, 1<<13), 0, rate48, 1)
	magnitude := make([]float64, len(s.h))
	for k, h := range s.h {
		magnitude[k] = cmplx.Abs(h)
	}
	carried := CarriedBands(magnitude, s.step, rate48)
	for i, b := range Bands(rate48) {
		want := b.Centre > 160 && b.Centre < 6000
		if carried[i] != want {
			t.Errorf("band %g Hz: carried %t, want %t", b.Nominal, carried[i], want)
		}
	}
}
