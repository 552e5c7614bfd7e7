package limits

import (
	"encoding/csv"
	"math"
	"os"
	"slices"
	"strconv"
	"strings"
	"testing"
)

// records reads a CSV file's rows without its head.
func records(t *testing.T, file string) [][]string {
	t.Helper()
	f, err := os.Open("testdata/" + file)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	all, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	return all[1:]
}

func number(t *testing.T, text string) float64 {
	t.Helper()
	v, err := strconv.ParseFloat(text, 64)
	if err != nil {
		t.Fatal(err)
	}
	return v
}

// published is one row of a CSV file.
type published struct {
	from, to, ms float64
	status       string
}

// tables has the rows of each set, by its name.
type tables map[string][]published

func (ts tables) add(t *testing.T, name, from, to, ms, status string) {
	t.Helper()
	ts[name] = append(ts[name], published{number(t, from), number(t, to), number(t, ms), status})
}

// studies names the set of each study, or of each of its signals. An empty
// name: left out, as the README of testdata says.
var studies = map[string]string{
	"Blauert & Laws 1978 (rounded, as widely tabulated)":                         "audibility",
	"Blauert & Laws 1978 (graph read by Liski et al. 2021)":                      "",
	"Blauert & Laws 1978 (one trained subject, asymptote)":                       "trained",
	"Blauert & Laws 1978 (trained panel, earphone-like pattern, peak to valley)": "",
	"Blauert & Laws 1978 (trained panel, loudspeaker-like pattern)":              "",
	"Flanagan, Moore & Stone 2005":                                               "flanagan",
	"Minnaar / Moller et al. 1999-2007":                                          "moller",
	"Jensen & Moller":                                                            "jensen",
	"Green 1971":                                                                 "green",
	"Deer et al. 1985":                                                           "deer",
	"Hoshino & Takegahara":                                                       "hoshino",
	"unit impulse, headphones ABX 75 % point":                                    "liski-impulse",
	"pink impulse, headphones ABX 75 % point":                                    "liski-pink",
	"castanet, headphones ABX 75 % point":                                        "liski-castanet",
	"hi-hat, headphones ABX 75 % point":                                          "liski-hihat",

	"J.21 / CCIR 505":            "j21",
	"J.22":                       "j22",
	"J.23":                       "j23",
	"G.712 analogue-to-analogue": "g712",
	"G.712 half channel (analogue-to-digital or digital-to-analogue)": "g712-half",
	"Q.55x-type exchange connection, analogue-to-analogue":            "exchange",
	"M.1020 conditioned leased circuit":                               "m1020",
	"7 CFR 1755.405 envelope delay distortion, point limit":           "cfr-1755",
}

func setFor(t *testing.T, keys ...string) string {
	t.Helper()
	for _, key := range keys {
		if name, ok := studies[key]; ok {
			return name
		}
	}
	t.Fatalf("no set for %q", keys)
	return ""
}

// fromCSV reads every row that a set must have: thresholds for late and early
// bands, masks of points and of steps.
func fromCSV(t *testing.T) (late, early, points, steps tables) {
	t.Helper()
	late, early, points, steps = tables{}, tables{}, tables{}, tables{}
	for _, r := range records(t, "group-delay-thresholds.csv") {
		study, hz, sign, ms, signal, status := r[0], r[1], r[2], r[3], r[4], r[5]
		name := setFor(t, study, signal)
		switch {
		case name == "" || hz == "mean":
		case sign == "+":
			late.add(t, name, hz, hz, ms, status)
		default:
			early.add(t, name, hz, hz, ms, status)
		}
	}
	early["audibility"] = early["moller"] // as its source says
	for _, r := range records(t, "j21.csv") {
		points.add(t, setFor(t, r[0]), r[2], r[2], r[3], r[4])
	}
	for _, r := range records(t, "g712.csv") {
		steps.add(t, setFor(t, r[0]), r[1], r[2], r[3], r[4])
	}
	return late, early, points, steps
}

// limitAt is what a set allows, in ms, at any one frequency to a band that is
// late (sign 1) or early (-1); NaN: nothing.
func limitAt(set Limit, hz, sign float64) float64 {
	// A second band an octave and a half away is on time, and in the table if it can be.
	for _, other := range []float64{hz * math.Exp2(1.5), hz / math.Exp2(1.5)} {
		for _, within := range []float64{1, 0.05} { // of the way: a mask's range may be narrow
			near := hz * math.Pow(other/hz, within)
			v := Judge(subject([]float64{hz, other, near}, []float64{sign, 0, 0}), []Limit{set})[0]
			if p, ok := v.at(hz); ok && p.Value != 0 {
				return p.Limit
			}
		}
	}
	return math.NaN()
}

// checkRamp holds a set against published points: at them, half way between
// them, and a tenth of an octave outside.
func checkRamp(t *testing.T, name string, rows []published, sign float64) {
	t.Helper()
	set, ok := setOf(name)
	if !ok {
		t.Errorf("there is no set %s", name)
		return
	}
	for i, r := range rows {
		within(t, name, limitAt(set, r.from, sign), sign*r.ms, 1e-9)
		if i > 0 {
			before := rows[i-1]
			within(t, name+", between", limitAt(set, math.Sqrt(before.from*r.from), sign), sign*(before.ms+r.ms)/2, 1e-9)
		}
	}
	checkOutside(t, set, rows, sign)
}

func checkOutside(t *testing.T, set Limit, rows []published, sign float64) {
	t.Helper()
	for _, hz := range []float64{rows[0].from * math.Exp2(-0.1), rows[len(rows)-1].to * math.Exp2(0.1)} {
		if got := limitAt(set, hz, sign); !math.IsNaN(got) {
			t.Errorf("%s allows %g ms at %g Hz, outside its range", set.Name, got, hz)
		}
	}
}

// Every set is its CSV rows: at the points, between them and outside.
func TestTablesAreThePublishedOnes(t *testing.T) {
	late, early, masks, stepped := fromCSV(t)
	for name, rows := range late {
		checkRamp(t, name, rows, 1)
	}
	for name, rows := range early {
		checkRamp(t, name, rows, -1)
	}
	for name, rows := range masks {
		checkRamp(t, name, rows, 1)
	}
	for name, rows := range stepped {
		set, _ := setOf(name)
		for i, r := range rows {
			within(t, name, limitAt(set, math.Sqrt(r.from*r.to), 1), r.ms, 1e-9)
			if i > 0 && r.from == rows[i-1].to {
				within(t, name+", where steps meet", limitAt(set, r.from, 1), min(r.ms, rows[i-1].ms), 1e-9)
			} else if i > 0 && !math.IsNaN(limitAt(set, math.Sqrt(rows[i-1].to*r.from), 1)) {
				t.Errorf("%s has a limit between %g and %g Hz", name, rows[i-1].to, r.from)
			}
		}
		checkOutside(t, set, rows, 1)
	}
	for _, set := range sets {
		rows := slices.Concat(late[set.Name], early[set.Name], masks[set.Name], stepped[set.Name])
		if len(rows) == 0 && !strings.Contains(set.Name, "-masking-") {
			t.Errorf("no row is %s", set.Name)
		}
		if len(early[set.Name]) == 0 && len(late[set.Name]) > 0 && !math.IsNaN(limitAt(set, late[set.Name][0].from, -1)) {
			t.Errorf("%s judges early bands, which its study has not", set.Name)
		}
		for _, r := range rows {
			if (set.Status == FromMemory) != strings.HasPrefix(r.status, "from-memory") {
				t.Errorf("%s is %q with a row that is %q", set.Name, set.Status, r.status)
			}
		}
	}
}

// The second reading of the graph differs by as much as the help says.
func TestTwoReadingsOfOneGraph(t *testing.T) {
	rounded, read := map[string]float64{}, map[string]float64{}
	for _, r := range records(t, "group-delay-thresholds.csv") {
		switch r[0] {
		case "Blauert & Laws 1978 (rounded, as widely tabulated)":
			rounded[r[1]] = number(t, r[3])
		case "Blauert & Laws 1978 (graph read by Liski et al. 2021)":
			read[r[1]] = number(t, r[3])
		}
	}
	worst := 0.0
	for hz, ms := range rounded {
		worst = max(worst, math.Abs(ms-read[hz]))
	}
	set, _ := setOf("audibility")
	within(t, "readings differ by, ms", worst, 0.2, 1e-9)
	if !strings.Contains(set.Help, "up to 0.2 ms") {
		t.Errorf("the help says %q", set.Help)
	}
}

// The intervals of masking are those that a row read in its source has, and the
// right side of the response is held against them.
func TestMaskingIsThePublishedOne(t *testing.T) {
	const pre, post = 1, 2 // columns
	for name, c := range map[string]struct {
		source, text string
		column       int
		ms           float64
	}{
		"pre-masking-20ms":   {"University course page", "up to 20", pre, 20},
		"pre-masking-10ms":   {"Encyclopaedic article", "about 10", pre, 10},
		"pre-masking-5ms":    {"Huang et al. 2001", "about 5", pre, 5},
		"pre-masking-2ms":    {"Spanias, Painter & Atti", "1-2 significant", pre, 2},
		"post-masking-200ms": {"University course page", "up to 200", post, 200},
		"post-masking-100ms": {"Instrument-maker documentation", "about 100", post, 100},
		"post-masking-50ms":  {"Encyclopaedic article", "about 50", post, 50},
	} {
		found := false
		for _, r := range records(t, "temporal-masking.csv") {
			found = found || strings.HasPrefix(r[0], c.source) && r[c.column] == c.text && strings.HasPrefix(r[3], "verified-read")
		}
		if !found {
			t.Errorf("%s: no row of %s says %q", name, c.source, c.text)
		}
		s := identity()
		s.Figures.PreRing.Pink.Length, s.Figures.PostRing.White.Length = c.ms/1e3, c.ms/1e3
		v := verdict(t, s, name)
		if v.Worst.Weights != map[int]string{pre: "pink", post: "white"}[c.column] || v.Outcome != Within || v.Status != Published {
			t.Errorf("%s at the limit: %+v", name, v)
		}
		within(t, name+" limit, ms", v.Worst.Limit, c.ms, 1e-12)
		s.Figures.PreRing.Pink.Length, s.Figures.PostRing.White.Length = 1.001*c.ms/1e3, 1.001*c.ms/1e3
		if v := verdict(t, s, name); v.Outcome != Exceeded {
			t.Errorf("%s beyond the limit: %+v", name, v)
		}
	}
}
