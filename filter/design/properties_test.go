package design

import (
	"math"
	"math/cmplx"
	"slices"
	"testing"

	"fettle/filter/response"

	"pgregory.net/rapid"
)

// drawn is a random design of any family.
type drawn struct {
	family string
	kind   Kind
	f      ZPK
	place  place
}

// drawFilter draws order 1 to 12, corners from 1e-4 to 0.49 of the rate and, of
// a band, a width from a thousandth of the lower edge up.
func drawFilter(t *rapid.T) drawn {
	family := rapid.SampledFrom(familyNamesInTests).Draw(t, "family")
	kind := Kind(rapid.IntRange(int(Lowpass), int(Bandstop)).Draw(t, "kind"))
	order := rapid.IntRange(1, 12).Draw(t, "order")
	if family == "linkwitz-riley" {
		order += order % 2
	}
	rate := rapid.SampledFrom([]float64{8000, 44100, 48000, 192000}).Draw(t, "rate")
	lower := rate * math.Pow(10, rapid.Float64Range(-4, -0.32).Draw(t, "log of the lower edge"))
	edges := []float64{lower}
	if kind.Edges() == 2 {
		ratio := 1 + math.Pow(10, rapid.Float64Range(-3, 3).Draw(t, "log of the width"))
		edges = append(edges, math.Min(lower*ratio, 0.49*rate))
	}
	ripple := rapid.Float64Range(0.01, 3).Draw(t, "ripple")
	reject := rapid.Float64Range(20, 120).Draw(t, "reject")
	f, err := byOrder(family, kind, order, rate, ripple, reject, edges...)
	if err != nil {
		t.Fatal(err)
	}
	return drawn{family, kind, f, place{rate, edges}}
}

func drawOmega(t *rapid.T) float64 {
	return math.Pi * math.Pow(10, rapid.Float64Range(-5, 0).Draw(t, "log of omega/pi"))
}

// closeTo fails unless got is within tol of want; NaN fails.
func closeTo(t *rapid.T, what string, got, want, tol float64) {
	if !(math.Abs(got-want) <= tol) {
		t.Fatalf("%s: got %.15g, want %.15g, off by %.3g, allowed %.3g", what, got, want, math.Abs(got-want), tol)
	}
}

// TestPropertyStable: for any family, corner and order the poles lie inside the
// circle, before and after the factoring, zeros on it or inside, and the cascade
// is the filter.
func TestPropertyStable(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		d := drawFilter(t)
		s := d.f.Sections()
		if !response.Stable(s) || !(response.MaxPoleRadius(s) < 1) {
			t.Fatalf("%s: not stable", d.family)
		}
		for i, p := range d.f.P {
			if !(cmplx.Abs(p) < 1 && cmplx.Abs(d.f.Z[i]) <= 1+1e-15) {
				t.Fatalf("%s: pole %v, zero %v", d.family, p, d.f.Z[i])
			}
		}
		allowed := 1e-9 + float64(len(s))*roundingOf(d.f)
		omega := drawOmega(t)
		closeTo(t, d.family, cmplx.Abs(response.SectionsAt(s, omega)-d.f.At(omega)), 0, allowed)
	})
}

// TestPropertyCascade: the response of a cascade is the product, its group
// delay the sum, of its sections', and so for two filters in a row.
func TestPropertyCascade(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		one, two := drawFilter(t).f.Sections(), drawFilter(t).f.Sections()
		both := append(append([]response.Section{}, one...), two...)
		omega := drawOmega(t)
		h, delay, size := complex(1, 0), 0.0, 0.0
		for i := range both {
			h *= response.SectionsAt(both[i:i+1], omega)
			part := response.SectionsGroupDelay(both[i:i+1], omega)
			delay, size = delay+part, size+math.Abs(part)
		}
		product := response.SectionsAt(one, omega) * response.SectionsAt(two, omega)
		closeTo(t, "product of the sections", cmplx.Abs(response.SectionsAt(both, omega)-h), 0, 1e-14*cmplx.Abs(h))
		closeTo(t, "product of the filters", cmplx.Abs(product-h), 0, 1e-14*cmplx.Abs(h))
		sum := response.SectionsGroupDelay(one, omega) + response.SectionsGroupDelay(two, omega)
		closeTo(t, "sum of the sections", response.SectionsGroupDelay(both, omega), delay, 1e-13*size)
		closeTo(t, "sum of the filters", sum, delay, 1e-13*size)
	})
}

// TestPropertyReflection: zeros moved out of the circle, and in again, leave the
// magnitude alone, and a design, which is minimum phase already, comes back as
// it was. A nearly double zero beside the circle is known to the square root of
// rounding only, hence 1e-7 for its radius.
func TestPropertyReflection(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		d := drawFilter(t)
		s := d.f.Sections()
		same, err := ReflectSections(s)
		if err != nil || !slices.Equal(same, s) {
			t.Fatalf("%s: %v became %v (%v)", d.family, s, same, err)
		}
		for i := range s {
			s[i].B0 += rapid.Float64Range(-1, 1).Draw(t, "change of b0")
			s[i].B2 += rapid.Float64Range(-1, 1).Draw(t, "change of b2")
		}
		reflected, err := ReflectSections(s)
		if err != nil {
			t.Fatal(err)
		}
		omega := drawOmega(t)
		for i := range s {
			want := cmplx.Abs(response.SectionsAt(s[i:i+1], omega))
			got := cmplx.Abs(response.SectionsAt(reflected[i:i+1], omega))
			peak := cmplx.Abs(response.SectionsAt([]response.Section{{B0: math.Abs(s[i].B0) + math.Abs(s[i].B1) + math.Abs(s[i].B2), A1: s[i].A1, A2: s[i].A2}}, omega))
			closeTo(t, "magnitude", got, want, 1e-12*peak)
			for _, z := range reflected[i].Zeros() {
				if !(cmplx.Abs(z) <= 1+1e-7) {
					t.Fatalf("a zero is left at radius %.12g", cmplx.Abs(z))
				}
			}
		}
	})
}
