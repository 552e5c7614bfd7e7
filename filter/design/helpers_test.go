package design

import (
	"encoding/csv"
	"encoding/json"
	"math"
	"math/cmplx"
	"os"
	"strconv"
	"strings"
	"sync"
	"testing"

	"fettle/filter/response"
)

// near fails unless got is within tol of want; NaN fails.
func near(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s: got %.15g, want %.15g, off by %.3g, allowed %.3g", what, got, want, math.Abs(got-want), tol)
	}
}

func noError(t *testing.T, err error) {
	t.Helper()
	if err != nil {
		t.Fatal(err)
	}
}

// wantError fails unless the error's text has all the parts.
func wantError(t *testing.T, err error, parts ...string) {
	t.Helper()
	if err == nil {
		t.Errorf("no error, want one about %q", parts)
		return
	}
	for _, part := range parts {
		if !strings.Contains(err.Error(), part) {
			t.Errorf("error %q does not say %q", err, part)
		}
	}
}

// fixture is testdata/fixtures.json; see fixtures.py for what made it.
type fixture struct {
	MadeWith       string `json:"made_with"`
	Butterworth    []recursiveCase
	Elliptic       []recursiveCase
	EllipticOrders []orderCase `json:"elliptic_orders"`
	Windows        []tapsCase
	Sincs          []tapsCase
	Bessel         []struct{ X, I0 float64 }
}

type recursiveCase struct {
	Kind           string
	Order          int
	Rate           float64
	Edges          []float64
	Ripple, Reject float64
	Zeros, Poles   [][2]float64
	Gain           float64
	Hz             []float64
	Response       [][2]float64
}

type orderCase struct {
	Kind           string
	Rate           float64
	Passes, Stops  []float64
	Ripple, Reject float64
	Order          int
}

type tapsCase struct {
	Kind  string
	N     int
	Beta  float64
	Scale bool
	Rate  float64
	Edges []float64
	Taps  []float64
}

// fixtureFile reads a JSON file of testdata once, whoever asks.
func fixtureFile[T any](name string) func(t *testing.T) *T {
	read := sync.OnceValues(func() (*T, error) {
		text, err := os.ReadFile("testdata/" + name)
		if err != nil {
			return nil, err
		}
		f := new(T)
		return f, json.Unmarshal(text, f)
	})
	return func(t *testing.T) *T {
		t.Helper()
		f, err := read()
		noError(t, err)
		return f
	}
}

var loadFixtures = fixtureFile[fixture]("fixtures.json")

func kindNamed(t *testing.T, name string) Kind {
	t.Helper()
	for k := Lowpass; k <= Bandstop; k++ {
		if k.String() == name {
			return k
		}
	}
	t.Fatalf("no kind %q", name)
	return 0
}

func readCSV(t *testing.T, name string) [][]string {
	t.Helper()
	f, err := os.Open("testdata/" + name)
	noError(t, err)
	defer f.Close()
	rows, err := csv.NewReader(f).ReadAll()
	noError(t, err)
	return rows[1:]
}

func number(t *testing.T, s string) float64 {
	t.Helper()
	v, err := strconv.ParseFloat(s, 64)
	noError(t, err)
	return v
}

func radians(hz, rate float64) float64 { return 2 * math.Pi * hz / rate }

// decibelsAt returns the cascade's gain in dB at hz.
func decibelsAt(s []response.Section, hz, rate float64) float64 {
	return toDB(cmplx.Abs(response.SectionsAt(s, radians(hz, rate))))
}
