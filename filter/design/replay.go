package design

import (
	"fmt"
	"math"
	"math/cmplx"
	"slices"
	"strings"
)

// ReplayCurve is an equalisation given by time constants:
//
//	H(s) = g prod(1 + s Zeros[i]) / prod(1 + s Poles[i])
//
// A time constant T, in seconds, puts a corner at 1/(2 pi T) Hz; a T of
// math.Inf(1) stands for the factor s itself, a root at 0 Hz. The factor g > 0
// makes the magnitude 1 at ReferenceHz (0: at 0 Hz).
//
// The curves of ReplayCurves and ReplayCurveOf are those of replay, that is, of
// de-emphasis; Inverse gives the recording side. FromMemory tells that the time
// constants were not seen in a standard or guideline: common practice, no
// source. They may be used, and must not be quoted as a standard's.
type ReplayCurve struct {
	Name        string
	Description string // one line
	Standard    string // what defines the curve
	FromMemory  bool

	Zeros, Poles []float64 // seconds, 1 us to 1 s or infinite
	ReferenceHz  float64
}

// ReplayCurves returns the standard curves, sorted by name, in slices of the
// caller's own. How they are named:
//
//   - cd, fm-50, fm-75, j17: de-emphasis of digital discs, of broadcasting and
//     of programme circuits, 0 dB at 0 Hz.
//   - riaa, riaa-7950 and the other fine-groove curves, and coarse-*: discs,
//     played with a velocity-proportional pickup, 0 dB at 1 kHz. coarse-T-R has
//     its bass turnover at T Hz and is R dB down at 10 kHz.
//   - tape-*, cassette-*: tape by standard and speed in inches a second, 0 dB at
//     1 kHz: the replay amplifier behind an ideal head, whose voltage grows with
//     frequency. With -flux added, the whole replay chain, for a signal that is
//     already proportional to flux: s times the other. Two tape curves of the
//     same form have the same ratio in either form.
func ReplayCurves() []ReplayCurve {
	curves := slices.Concat(emphasisCurves(), discCurves(), tapeCurves())
	slices.SortFunc(curves, func(a, b ReplayCurve) int { return strings.Compare(a.Name, b.Name) })
	return curves
}

// ReplayCurveNamed returns the standard curve of that name. An unknown name is
// an error that lists all.
func ReplayCurveNamed(name string) (ReplayCurve, error) {
	var names []string
	for _, c := range ReplayCurves() {
		if c.Name == name {
			return c, nil
		}
		names = append(names, c.Name)
	}
	return ReplayCurve{}, fmt.Errorf("there is no replay curve %q; choose one of %s, or give its time constants", name, strings.Join(names, ", "))
}

const (
	shortestTime = 1e-6 // seconds; 159 kHz
	longestTime  = 1.0  // 0.16 Hz
)

// ReplayCurveOf returns the replay curve of one to three time constants in
// seconds, 1 us to 1 s, which are in this order a pole, a zero and a pole:
//
//   - [T] is a de-emphasis 1/(1 + sT), 0 dB at 0 Hz.
//   - [T1, T2] is (1 + s T2)/(1 + s T1), 0 dB at 1 kHz: the amplifier behind an
//     ideal tape head, bass time constant first, or a shelving de-emphasis.
//   - [T1, T2, T3] is (1 + s T2)/((1 + s T1)(1 + s T3)), 0 dB at 1 kHz: a disc,
//     bass shelf, turnover and treble roll-off.
//
// Their order counts, not their size: [T2, T1] is the inverse of [T1, T2]. It
// fails for another number of times and for a time out of range.
func ReplayCurveOf(times []float64) (ReplayCurve, error) {
	if len(times) < 1 || len(times) > 3 {
		return ReplayCurve{}, fmt.Errorf("replay: %d time constants, where 1 (de-emphasis), 2 (tape: bass, treble) or 3 (disc: bass shelf, turnover, treble) are possible", len(times))
	}
	c := ReplayCurve{Standard: "time constants as given"}
	var texts []string
	for i, t := range times {
		if err := checkTime(t); err != nil {
			return ReplayCurve{}, fmt.Errorf("replay: %w", err)
		}
		if i%2 == 0 {
			c.Poles = append(c.Poles, t)
		} else {
			c.Zeros = append(c.Zeros, t)
		}
		texts = append(texts, fmt.Sprintf("%.6g us", t*1e6))
	}
	c.Name = strings.Join(texts, ", ")
	c.Description = "replay curve of " + c.Name
	if len(times) > 1 {
		c.ReferenceHz = 1000
	}
	return c, nil
}

func checkTime(seconds float64) error {
	if !(seconds >= shortestTime && seconds <= longestTime) {
		return fmt.Errorf("a time constant of %g s is not between 1 us and 1 s", seconds)
	}
	return nil
}

// RollOffTime returns the time constant, in seconds, of the first-order
// roll-off that is dropDB (above 0 dB) down at 10 kHz, the form in which disc
// labels stated their treble: sqrt(10^(dropDB/10) - 1)/(2 pi 10 kHz). Printed
// corners and printed drops do not always agree; show both.
func RollOffTime(dropDB float64) (seconds float64, err error) {
	if !(dropDB > 0 && dropDB <= 40) {
		return 0, fmt.Errorf("replay: a roll-off of %g dB at 10 kHz is not above 0 dB and at most 40 dB", dropDB)
	}
	return math.Sqrt(math.Pow(10, dropDB/10)-1) / (2 * math.Pi * 1e4), nil
}

// Inverse swaps poles and zeros: the recording curve (pre-emphasis) of a replay
// curve, and the other way round. Its magnitude is the reciprocal everywhere,
// with 0 dB at the same frequency. An inverse with more zeros than poles rises
// without bound in analogue; at a sample rate it is finite, see Sections.
func (c ReplayCurve) Inverse() ReplayCurve {
	const prefix = "inverse of "
	name, inverted := strings.CutPrefix(c.Name, prefix)
	if !inverted {
		name = prefix + name
	}
	c.Name = name
	c.Zeros, c.Poles = slices.Clone(c.Poles), slices.Clone(c.Zeros)
	return c
}

// Analogue returns H at hz, 0 or above. At 0 Hz it is 0 with a zero there, and
// infinite with a pole there.
func (c ReplayCurve) Analogue(hz float64) complex128 {
	if hz == 0 && slices.ContainsFunc(c.Poles, atDC) {
		return cmplx.Inf()
	}
	return c.unscaled(hz) / complex(cmplx.Abs(c.unscaled(c.ReferenceHz)), 0)
}

// DecibelsAt returns 20 log10 |H| at hz.
func (c ReplayCurve) DecibelsAt(hz float64) float64 { return toDB(cmplx.Abs(c.Analogue(hz))) }

// GroupDelay returns the analogue curve's group delay at hz, in seconds: of a
// pole T/(1 + (wT)^2), of a zero its negative, of a root at 0 Hz none.
func (c ReplayCurve) GroupDelay(hz float64) (seconds float64) {
	return delayOfCorners(c.Poles, hz) - delayOfCorners(c.Zeros, hz)
}

func delayOfCorners(times []float64, hz float64) (seconds float64) {
	for _, t := range times {
		if !atDC(t) {
			turn := 2 * math.Pi * hz * t
			seconds += t / (1 + turn*turn)
		}
	}
	return seconds
}

func atDC(time float64) bool { return math.IsInf(time, 1) }

// unscaled is H with g = 1.
func (c ReplayCurve) unscaled(hz float64) complex128 {
	return cornerProduct(c.Zeros, hz) / cornerProduct(c.Poles, hz)
}

func cornerProduct(times []float64, hz float64) complex128 {
	w, product := 2*math.Pi*hz, complex(1, 0)
	for _, t := range times {
		if atDC(t) {
			product *= complex(0, w)
		} else {
			product *= complex(1, w*t)
		}
	}
	return product
}
