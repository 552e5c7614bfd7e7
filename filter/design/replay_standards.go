package design

import (
	"fmt"
	"math"
)

// The time constants of this file are as read in the document named, unless
// fromMemory says otherwise. Where only corner frequencies are printed,
// T = 1/(2 pi f).

const us = 1e-6 // one microsecond, in seconds

// fromMemory marks a curve as common practice without a source that was seen.
const fromMemory = true

func cornerTime(hz float64) float64 { return 1 / (2 * math.Pi * hz) }

// emphasisCurves are 0 dB at 0 Hz. The constants of fm-50 and fm-75 are from
// memory. J.17 prints its pre-emphasis as insertion loss,
// 10 lg((75 + (w/3000)^2)/(1 + (w/3000)^2)) dB: a zero at 3000 rad/s and a pole
// at 3000 sqrt(75) rad/s, here in replay's sense.
func emphasisCurves() []ReplayCurve {
	return []ReplayCurve{
		{Name: "cd", Description: "compact disc de-emphasis, 50 us and 15 us", Standard: "IEC 60908",
			Poles: []float64{50 * us}, Zeros: []float64{15 * us}},
		{Name: "j17", Description: "de-emphasis of programme circuits, corners 477.5 Hz and 4135 Hz", Standard: "ITU-T J.17",
			Poles: []float64{1 / 3000.0}, Zeros: []float64{1 / (3000 * math.Sqrt(75))}},
		{Name: "fm-50", Description: "FM broadcast de-emphasis 50 us, most of the world", Standard: "common practice", FromMemory: fromMemory,
			Poles: []float64{50 * us}},
		{Name: "fm-75", Description: "FM broadcast de-emphasis 75 us, the Americas and Korea", Standard: "common practice", FromMemory: fromMemory,
			Poles: []float64{75 * us}},
	}
}

const iasa = "IASA-TC 04, section 5.3, table 1"

// discCurves has every row of that table whose printed corner and printed drop
// at 10 kHz agree within 0.7 dB, the corners taken; they rarely agree better.
// The row for ffrr 1949 does not: 3000 Hz is -10.8 dB, and -5 dB is printed.
// Nor does the row for RIAA: 2500 Hz is -12.3 dB, where the printed -13.7 dB
// means the 2122 Hz of IEC 60098. The coarse-groove curves are from memory but
// for the two of the AES calibration disc, and under the same rule; of two
// readings that with the better agreement is taken. Labels changed curves
// without notice, so a curve is a choice to be recorded, never one to be
// derived from a label.
func discCurves() []ReplayCurve {
	return []ReplayCurve{
		disc("riaa", "fine groove since 1955: 3180, 318 and 75 us", "IEC 60098, BS 1928:1955", 3180*us, 318*us, 75*us),
		subsonic(disc("riaa-7950", "riaa with the replay high-pass of the amendment, 7950 us (20 Hz)", "IEC 60098, amendment", 3180*us, 318*us, 75*us), 7950*us),

		disc("aes-1951", "fine groove: 50, 400 and 2500 Hz (turnover also given as 375 Hz; -12 dB printed)", iasa, cornerTime(50), cornerTime(400), cornerTime(2500)),
		disc("ffrr-1951", "fine groove: no shelf, 300 and 2120 Hz (turnover also given as 250 Hz; -14 dB printed)", iasa, math.Inf(1), cornerTime(300), cornerTime(2120)),
		disc("ffrr-1953", "fine groove: 100, 450 and 3180 Hz (also given as 500 and 5200 Hz; -11 dB printed)", iasa, cornerTime(100), cornerTime(450), cornerTime(3180)),
		disc("lp-col", "fine groove: 100, 500 and 1590 Hz (-16 dB printed)", iasa, cornerTime(100), cornerTime(500), cornerTime(1590)),
		disc("nab-disc", "fine groove: no shelf, 500 and 1590 Hz (-16 dB printed)", iasa, math.Inf(1), cornerTime(500), cornerTime(1590)),
		disc("orthophonic", "fine groove: 50, 500 and 3180 Hz (treble also given as 5200 Hz; -11 dB printed)", iasa, cornerTime(50), cornerTime(500), cornerTime(3180)),

		disc("coarse-aes-flat", "coarse-groove calibration disc, first side: 3180 and 450 us, treble flat", "AES coarse-groove calibration disc", 3180*us, 450*us),
		disc("coarse-aes-50", "coarse-groove calibration disc, second side: 3180, 450 and 50 us", "AES coarse-groove calibration disc", 3180*us, 450*us, 50*us),
		remembered(disc("coarse-bs1928", "European coarse groove: 3180, 450 and 50 us", "BS 1928:1955, DIN", 3180*us, 450*us, 50*us)),
		remembered(disc("coarse-250-flat", "coarse groove, Britain from 1931: 250 Hz, treble flat", "common practice", math.Inf(1), cornerTime(250))),
		remembered(disc("coarse-300-16", "coarse groove, from 1938: 300 and 1590 Hz (turnover also given as 250 Hz)", "common practice", math.Inf(1), cornerTime(300), cornerTime(1590))),
		remembered(disc("coarse-400-12", "coarse groove, from 1934: 400 and 2500 Hz", "common practice", math.Inf(1), cornerTime(400), cornerTime(2500))),
		remembered(disc("coarse-200-7", "coarse groove, from 1925: 200 and 5200 Hz (also given as 250 and 5500 Hz)", "common practice", math.Inf(1), cornerTime(200), cornerTime(5200))),
		remembered(disc("coarse-500-7", "coarse groove, 1938 to 1947: 500 and 5200 Hz (treble also given as 5500 Hz)", "common practice", math.Inf(1), cornerTime(500), cornerTime(5200))),
	}
}

// disc takes the time constants of bass shelf (infinite: none), turnover and,
// if there is one, treble roll-off.
func disc(name, description, standard string, shelf, turnover float64, treble ...float64) ReplayCurve {
	return ReplayCurve{Name: name, Description: description, Standard: standard, ReferenceHz: 1000,
		Zeros: []float64{turnover}, Poles: append([]float64{shelf}, treble...)}
}

// subsonic adds a high-pass of first order.
func subsonic(c ReplayCurve, time float64) ReplayCurve {
	c.Zeros = append(c.Zeros, math.Inf(1))
	c.Poles = append(c.Poles, time)
	return c
}

func remembered(c ReplayCurve) ReplayCurve {
	c.FromMemory = fromMemory
	return c
}

// tapeCurves lists tape by the time constants T1 (bass, infinite: none) and T2
// (treble) of the recorded flux, whose level is
// 10 lg(1 + 1/(w T1)^2) - 10 lg(1 + (w T2)^2) dB (IEC 60094-1). The time
// constants of open-reel tape were read in IASA-TC 04, section 5.4; the formula
// and the cassette's constants are from memory.
func tapeCurves() []ReplayCurve {
	none := math.Inf(1)
	return inBothForms([]tape{
		{"tape-aes-30", "76 cm/s, current", "IEC 60094-1 (IEC2), AES", none, 17.5 * us, false},
		{"tape-iec1-30", "76 cm/s, older", "IEC 60094-1 (IEC1), CCIR, DIN", none, 35 * us, false},
		{"tape-iec1-15", "38 cm/s, current", "IEC 60094-1 (IEC1), CCIR, DIN, BS", none, 35 * us, false},
		{"tape-nab-15", "38 cm/s, current", "NAB, EIA", 3180 * us, 50 * us, false},
		{"tape-iec1-7.5", "19 cm/s, current", "IEC 60094-1 (IEC1), DIN studio, CCIR", none, 70 * us, false},
		{"tape-nab-7.5", "19 cm/s, current", "IEC 60094-1 (IEC2), NAB, DIN home", 3180 * us, 50 * us, false},
		{"tape-ccir-7.5", "19 cm/s, to about 1966", "CCIR, IEC, DIN, BS, older", none, 100 * us, false},
		{"tape-nab-3.75", "9.5 cm/s, current", "IEC 60094-1 (IEC2), NAB", 3180 * us, 90 * us, false},
		{"tape-din-3.75", "9.5 cm/s, 1962", "DIN", 3180 * us, 120 * us, false},
		{"tape-din-1955-3.75", "9.5 cm/s, 1955 to 1961", "DIN", none, 200 * us, false},
		{"tape-iec-1962-3.75", "9.5 cm/s, 1962 to 1968", "IEC", 3180 * us, 140 * us, false},
		{"cassette-120", "cassette, type I", "IEC 60094", 3180 * us, 120 * us, fromMemory},
		{"cassette-70", "cassette, types II and IV", "IEC 60094", 3180 * us, 70 * us, fromMemory},
	})
}

type tape struct {
	name, what, standard string
	bass, treble         float64
	fromMemory           bool
}

// inBothForms gives both forms of each tape.
func inBothForms(tapes []tape) []ReplayCurve {
	var curves []ReplayCurve
	for _, t := range tapes {
		curves = append(curves, t.amplifier(), t.chain())
	}
	return curves
}

func (t tape) amplifier() ReplayCurve {
	return ReplayCurve{Name: t.name, Description: t.describe("amplifier behind an ideal head"), Standard: t.standard, FromMemory: t.fromMemory,
		Zeros: []float64{t.treble}, Poles: []float64{t.bass}, ReferenceHz: 1000}
}

// chain is s times the amplifier; without a bass time constant, s and 1/s leave
// nothing of each other.
func (t tape) chain() ReplayCurve {
	c := t.amplifier()
	c.Name += "-flux"
	c.Description = t.describe("for a signal proportional to flux")
	if atDC(t.bass) {
		c.Poles = nil
	} else {
		c.Zeros = append(c.Zeros, math.Inf(1))
	}
	return c
}

func (t tape) describe(form string) string {
	if atDC(t.bass) {
		return fmt.Sprintf("tape, %s: %g us; %s", t.what, t.treble/us, form)
	}
	return fmt.Sprintf("tape, %s: %g and %g us; %s", t.what, t.bass/us, t.treble/us, form)
}
