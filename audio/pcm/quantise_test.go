package pcm

import (
	"bytes"
	"math"
	"math/big"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

// TestRoundsHalvesToEven against exact rational arithmetic, at and next to the
// halves, for every width.
func TestRoundsHalvesToEven(t *testing.T) {
	for _, e := range []Encoding{{Bytes: 1, Bits: 8}, {Bytes: 2, Bits: 16}, {Bytes: 3, Bits: 24}, {Bytes: 4, Bits: 32}} {
		var x []float64
		var want []byte
		for _, c := range someCodes(e.Bits) {
			if c&63 > 3 && e.Bits > 8 {
				continue // a sixteenth of them will do
			}
			half := math.Ldexp(float64(c)+0.5, 1-e.Bits)
			for _, v := range []float64{math.Nextafter(half, -2), half, math.Nextafter(half, 2)} {
				code := nearestCode(v, e.Bits)
				if code >= 1<<(e.Bits-1) {
					continue // an over
				}
				x, want = append(x, v), appendCode(want, e, code)
			}
		}
		if got := encode(t, e, x); !bytes.Equal(got, want) {
			t.Errorf("%v: of %d samples some are rounded otherwise", e, len(x))
		}
	}
}

// nearestCode is the slow twin of the rounding: exact, halves to even.
func nearestCode(v float64, bits int) int64 {
	y := new(big.Rat).SetFloat64(v)
	y.Mul(y, big.NewRat(1<<(bits-1), 1))
	floor := new(big.Int).Div(y.Num(), y.Denom()) // Euclidean, so downwards
	fraction := new(big.Rat).Sub(y, new(big.Rat).SetInt(floor))
	up := fraction.Cmp(big.NewRat(1, 2))
	if up > 0 || up == 0 && floor.Bit(0) == 1 {
		floor.Add(floor, big.NewInt(1))
	}
	return floor.Int64()
}

// TestNoBias: a fine ramp has no mean error; truncation would leave half an LSB.
func TestNoBias(t *testing.T) {
	e := Encoding{Bytes: 2, Bits: 16}
	x := make([]float64, 100_001)
	for i := range x {
		x[i] = float64(i-50_000) / 50_000 * 0.9
	}
	sum := 0.
	for i, v := range decode(e, encode(t, e, x)) {
		sum += (v - x[i]) * 32768
	}
	if mean := sum / float64(len(x)); !(math.Abs(mean) <= 0.01) {
		t.Errorf("mean error %g LSB, allowed 0.01", mean)
	}
}

// TestOvers: what is beyond the range is clamped, counted and remembered.
func TestOvers(t *testing.T) {
	for _, e := range []Encoding{{Bytes: 1, Bits: 8}, {Bytes: 2, Bits: 16}, {Bytes: 2, Bits: 12}, {Bytes: 3, Bits: 24}, {Bytes: 4, Bits: 32}} {
		q := mustQuantiser(t, e, 2, nil)
		src := []float64{0, -1, 0.5, 1.0, -1.5, 0.25, 1.25, 1e290}
		dst := make([]byte, len(src)*e.Bytes)
		if err := q.Encode(dst, src); err != nil {
			t.Fatal(err)
		}
		most := 1 - math.Ldexp(1, 1-e.Bits)
		want := []float64{0, -1, 0.5, most, -1, 0.25, most, most}
		for i, v := range decode(e, dst) {
			if v != want[i] {
				t.Errorf("%v: %g became %g, want %g", e, src[i], v, want[i])
			}
		}
		frame, channel := q.FirstOver()
		if q.Overs() != 4 || frame != 1 || channel != 1 || q.OverPeak() != 1e290 {
			t.Errorf("%v: %d overs, first at frame %d channel %d, peak %g", e, q.Overs(), frame, channel, q.OverPeak())
		}
	}
}

func TestNoOvers(t *testing.T) {
	q := mustQuantiser(t, Encoding{Bytes: 2, Bits: 16}, 1, nil)
	// -1 and the half LSB beyond the ends that rounding forgives.
	src := []float64{-1, 32767. / 32768, -32768.5 / 32768, 32767.49 / 32768}
	if err := q.Encode(make([]byte, 8), src); err != nil {
		t.Fatal(err)
	}
	if frame, channel := q.FirstOver(); q.Overs() != 0 || q.HeadroomDB() != 0 || frame != -1 || channel != -1 || q.OverPeak() != 0 {
		t.Errorf("%d overs, headroom %g, first %d, %d", q.Overs(), q.HeadroomDB(), frame, channel)
	}
}

// TestHeadroom: by the figures, and by doing it. +1 needs 20 log10(32768/32767).
func TestHeadroom(t *testing.T) {
	tests := []struct {
		x, want float64
		dither  bool
	}{
		{1, 20 * math.Log10(32768./32767), false},
		{2, 20 * math.Log10(65536./32767), false},
		{-2, 20 * math.Log10(2), false},
		{2, 20 * math.Log10(65536./32766), true},
		{-2, 20 * math.Log10(65536./32767), true},
	}
	for _, test := range tests {
		q := headroomOf(t, []float64{0.3, test.x, -0.2}, 1, test.dither)
		// One rounding each in the ratio, the logarithm and the product.
		if got := q.HeadroomDB(); !(math.Abs(got-test.want) <= 1e-14) {
			t.Errorf("%g with dither %t: %.17g dB, want %.17g", test.x, test.dither, got, test.want)
		}
	}
}

func headroomOf(t interface {
	Helper()
	Fatal(...any)
}, x []float64, gain float64, dithered bool) *Quantiser {
	t.Helper()
	var dither []*Dither
	if dithered {
		dither = []*Dither{NewDither([32]byte{7}, "x.wav", 0)}
	}
	q, err := NewQuantiser(Encoding{Bytes: 2, Bits: 16}, 1, dither)
	if err != nil {
		t.Fatal(err)
	}
	y := make([]float64, len(x))
	for i, v := range x {
		y[i] = gain * v
	}
	if err := q.Encode(make([]byte, 2*len(y)), y); err != nil {
		t.Fatal(err)
	}
	return q
}

// TestHeadroomSuffices: after the attenuation asked for there are no overs, and
// with 2 LSB more than that left out there are, without dither.
func TestHeadroomSuffices(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		x := rapid.SliceOfN(rapid.Float64Range(-4, 4), 1, 300).Draw(t, "x")
		dithered := rapid.Bool().Draw(t, "dithered")
		need := headroomOf(t, x, 1, dithered).HeadroomDB()
		gain := math.Pow(10, -need/20)
		if over := headroomOf(t, x, gain, dithered).Overs(); over != 0 {
			t.Fatalf("%d overs after %g dB", over, need)
		}
		if need > 0 && !dithered && headroomOf(t, x, gain*(1+2./32768), false).Overs() == 0 {
			t.Fatalf("%g dB are more than needed", need)
		}
	})
}

func TestNonFinite(t *testing.T) {
	float32s := Encoding{Float: true, Bytes: 4, Bits: 32}
	tests := []struct {
		e     Encoding
		value float64
		say   string
	}{
		{Encoding{Bytes: 1, Bits: 8}, math.NaN(), "NaN"},
		{Encoding{Bytes: 2, Bits: 16}, math.Inf(1), "+Inf"},
		{Encoding{Bytes: 3, Bits: 24}, math.Inf(-1), "-Inf"},
		{Encoding{Bytes: 4, Bits: 32}, 1e308, "1e+308 times full scale"},
		{float32s, math.NaN(), "NaN"},
		{float32s, 1e39, "1e+39 times full scale, too much for 32-bit float"},
		{Encoding{Float: true, Bytes: 8, Bits: 64}, math.Inf(1), "+Inf"},
	}
	for _, test := range tests {
		for _, dither := range [][]*Dither{nil, {NewDither([32]byte{}, "x", 0), nil}} {
			if dither != nil && test.e.Float {
				continue
			}
			q := mustQuantiser(t, test.e, 2, dither)
			if err := q.Encode(make([]byte, 2*test.e.Bytes), []float64{0.1, 0.2}); err != nil {
				t.Fatal(err)
			}
			// Two at once: the earlier frame counts, although it is in the later channel.
			err := q.Encode(make([]byte, 6*test.e.Bytes), []float64{0, 0, 0, test.value, test.value, 0})
			if err == nil || !strings.Contains(err.Error(), "frame 2, channel 2") || !strings.Contains(err.Error(), test.say) {
				t.Errorf("%v, %g: %v", test.e, test.value, err)
			}
		}
	}
}

// TestSplit: any split into calls gives the same bytes and the same counts.
func TestSplit(t *testing.T) {
	const channels = 3
	x := noise(3*5000, 1.01)
	run := func(e Encoding, step int) (*Quantiser, []byte) {
		q := mustQuantiser(t, e, channels, ditherFor(e, channels))
		out := make([]byte, len(x)*e.Bytes)
		for at := 0; at < len(x); at += step * channels {
			end := min(len(x), at+step*channels)
			if err := q.Encode(out[at*e.Bytes:end*e.Bytes], x[at:end]); err != nil {
				t.Fatal(err)
			}
		}
		return q, out
	}
	for _, n := range named {
		q, want := run(n.e, len(x))
		frame, channel := q.FirstOver()
		for _, step := range []int{1, 7, 682, 683, 4999} { // 682 is a block
			p, got := run(n.e, step)
			f, c := p.FirstOver()
			if !bytes.Equal(got, want) || p.Overs() != q.Overs() || f != frame || c != channel || p.HeadroomDB() != q.HeadroomDB() {
				t.Errorf("%s in steps of %d frames differs", n.name, step)
			}
		}
		if !n.e.Float && q.Overs() == 0 {
			t.Errorf("%s: the test has no overs", n.name)
		}
	}
}

// ditherFor gives every channel but the second one dither, if the encoding
// takes any.
func ditherFor(e Encoding, channels int) []*Dither {
	dither := make([]*Dither, channels)
	for c := range dither {
		if c != 1 && !e.Float {
			dither[c] = NewDither([32]byte{1}, "a.wav", c)
		}
	}
	return dither
}

// TestDitherOnlyWhereAsked: codes in a channel without dither stay as they are.
func TestDitherOnlyWhereAsked(t *testing.T) {
	e := Encoding{Bytes: 2, Bits: 16}
	x := make([]float64, 3*1000)
	for i := range x {
		x[i] = float64(i-1500) / 32768
	}
	out := make([]byte, 2*len(x))
	if err := mustQuantiser(t, e, 3, ditherFor(e, 3)).Encode(out, x); err != nil {
		t.Fatal(err)
	}
	changed := [3]int{}
	for i, v := range decode(e, out) {
		if v != x[i] {
			changed[i%3]++
		}
		if !(math.Abs(v-x[i])*32768 <= 1) {
			t.Fatalf("sample %d moved by %g LSB", i, (v-x[i])*32768)
		}
	}
	if changed[0] == 0 || changed[1] != 0 || changed[2] == 0 {
		t.Errorf("changed samples in the channels: %v, want none in the second only", changed)
	}
}
