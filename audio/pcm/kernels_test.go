package pcm

import (
	"encoding/binary"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"fettle/audio/asmtest"
	"fettle/audio/internal/vector"
	"fettle/audio/internal/vector/vectortest"

	"pgregory.net/rapid"
)

func TestAssemblyIsCurrent(t *testing.T) {
	asmtest.Current(t, "../_asm", "./pcm", "-out", "../pcm/kernels_amd64.s", "-stubs", "../pcm/kernels_amd64.go", "-pkg", "pcm")
}

func TestPuregoHasNoAssembly(t *testing.T) { asmtest.WithoutAssembly(t, "kernels_amd64.s") }

// longest is some groups and every rest.
const longest = 70

// encodings are the named ones and some with fewer bits than their containers.
func encodings() []Encoding {
	e := []Encoding{{Bytes: 1, Bits: 5}, {Bytes: 2, Bits: 12}, {Bytes: 3, Bits: 20}, {Bytes: 4, Bits: 24}, {Bytes: 4, Bits: 8}}
	for _, n := range named {
		e = append(e, n.e)
	}
	return e
}

// TestDecodeIsTheSame: as plain Go, for any bytes and any lengths, wherever they
// stand, and nothing else is written to.
func TestDecodeIsTheSame(t *testing.T) {
	vectortest.Each(t, func(t *testing.T) {
		r := rand.New(rand.NewPCG(21, 22))
		for _, e := range encodings() {
			for n := range longest + 1 {
				from := r.IntN(16)
				src := make([]byte, from+n*e.Bytes)
				for i := range src {
					src[i] = byte(r.Uint32())
				}
				src = src[from:]
				got, want := slices.Repeat([]float64{0.123}, 9+longest+9), slices.Repeat([]float64{0.123}, 9+longest+9)
				at := r.IntN(9)
				Decode(got[at:at+n], src, e)
				decodeGeneric(want[at:at+n], src, e)
				for i := range want {
					if math.Float64bits(got[i]) != math.Float64bits(want[i]) {
						t.Fatalf("%v, %d samples: number %d is %v, want %v", e, n, i-at, got[i], want[i])
					}
				}
			}
		}
	})
}

// encoded is all that an encoding leaves behind.
type encoded struct {
	bytes    string // none after an error
	err      string
	overs    int64
	peak     float64
	frame    int64
	channel  int
	headroom float64
}

// encodeIn encodes in calls of so many frames, the last of which gets the rest.
func encodeIn(t testing.TB, e Encoding, x []float64, channels int, dithered []bool, calls []int) (result encoded) {
	dither := make([]*Dither, channels)
	for c := range dither {
		if dithered[c] && !e.Float {
			dither[c] = NewDither([32]byte{5}, "k.wav", c)
		}
	}
	q := mustQuantiser(t, e, channels, dither)
	out := make([]byte, len(x)*e.Bytes)
	at := 0
	for _, n := range append(calls, len(x)/channels) {
		end := min(at+n*channels, len(x))
		if err := q.Encode(out[at*e.Bytes:end*e.Bytes], x[at:end]); err != nil {
			result.err = err.Error()
			break
		}
		at = end
	}
	if result.err == "" {
		result.bytes = string(out)
	}
	result.overs, result.peak, result.headroom = q.Overs(), q.OverPeak(), q.HeadroomDB()
	result.frame, result.channel = q.FirstOver()
	return result
}

// mustEncodeAlike compares every set with plain Go.
func mustEncodeAlike(t interface {
	Helper()
	Fatalf(string, ...any)
}, tb testing.TB, e Encoding, x []float64, channels int, dithered []bool, calls []int) {
	t.Helper()
	var want encoded
	for _, s := range vector.All() {
		if !s.Available() {
			continue
		}
		restore := vector.Use(s)
		got := encodeIn(tb, e, x, channels, dithered, calls)
		restore()
		if s == vector.None {
			want = got
		} else if got != want {
			t.Fatalf("%v, %v, %d channels, dither %v, calls %v of %v:\n%+v, want\n%+v", s, e, channels, dithered, calls, x, got, want)
		}
	}
}

// hardSamples are where rounding, clamping and refusing decide, in LSB of so many
// bits, and nothing that is refused.
func hardSamples(bits int) []float64 {
	full := math.Ldexp(1, bits-1)
	var x []float64
	for _, lsb := range []float64{0, 0.25, 0.5, 1, 1.5, 2.5, 3, full / 2, full - 3, full - 2.5, full - 2, full - 1.5, full - 1, full - 0.5, full, full + 0.5, full + 1, 3 * full} {
		for _, v := range []float64{math.Nextafter(lsb, -1), lsb, math.Nextafter(lsb, 1e9)} {
			x = append(x, v/full, -v/full)
		}
	}
	return append(x, math.Copysign(0, -1), math.SmallestNonzeroFloat64, 0x1p-1040, -0x1p-1022, 0x1p-149, 0x1p-150, -0x1p-126, math.MaxFloat32, -math.MaxFloat32)
}

// TestEncodeIsTheSame: bytes, overs and errors are those of plain Go, for any mix
// of easy, hard and impossible samples.
func TestEncodeIsTheSame(t *testing.T) {
	impossible := []float64{math.NaN(), math.Inf(1), math.Inf(-1), 1e308, -1e39, math.MaxFloat32 * (1 + 0x1p-25)}
	rapid.Check(t, func(rt *rapid.T) {
		e := rapid.SampledFrom(encodings()).Draw(rt, "encoding")
		channels := rapid.SampledFrom([]int{1, 2, 3, 5}).Draw(rt, "channels")
		dithered := rapid.SliceOfN(rapid.Bool(), channels, channels).Draw(rt, "dithered")
		frames := rapid.OneOf(rapid.IntRange(0, longest), rapid.IntRange(0, 2*blockSamples/channels)).Draw(rt, "frames")
		seed := rapid.Uint64().Draw(rt, "seed")
		r := rand.New(rand.NewPCG(seed, 3))
		hard, hardness := hardSamples(e.Bits), rapid.SampledFrom([]float64{0, 0.01, 0.9}).Draw(rt, "hardness")
		x := make([]float64, channels*frames)
		for i := range x {
			if x[i] = 1.8*r.Float64() - 0.9; r.Float64() < hardness {
				x[i] = hard[r.IntN(len(hard))]
			}
		}
		if len(x) > 0 && rapid.Bool().Draw(rt, "refused") {
			x[rapid.IntRange(0, len(x)-1).Draw(rt, "at")] = rapid.SampledFrom(impossible).Draw(rt, "sample")
		}
		calls := rapid.SliceOfN(rapid.IntRange(0, longest), 0, 20).Draw(rt, "calls")
		mustEncodeAlike(rt, t, e, x, channels, dithered, calls)
	})
}

// FuzzEncode: as TestEncodeIsTheSame, for samples of any bits.
func FuzzEncode(f *testing.F) {
	var b []byte
	for _, v := range hardSamples(16) {
		b = binary.LittleEndian.AppendUint64(b, math.Float64bits(v))
	}
	for i := range encodings() {
		f.Add(b, uint8(i), uint8(i), uint8(3*i))
	}
	f.Fuzz(func(t *testing.T, b []byte, encoding, channels, call uint8) {
		all := encodings()
		n := int(channels)%4 + 1
		x := make([]float64, min(len(b)/8, 1000)/n*n)
		for i := range x {
			x[i] = math.Float64frombits(binary.LittleEndian.Uint64(b[8*i:]))
		}
		dithered := []bool{call&1 != 0, call&2 != 0, call&4 != 0, call&8 != 0}
		mustEncodeAlike(t, t, all[int(encoding)%len(all)], x, n, dithered, []int{int(call)})
	})
}

// TestDrawIsTheSame: numbers and states, for every number of turns.
func TestDrawIsTheSame(t *testing.T) {
	vectortest.Each(t, func(t *testing.T) {
		for turns := range 20 {
			a, b := NewDither([32]byte{6}, "d.wav", turns), NewDither([32]byte{6}, "d.wav", turns)
			got, want := make([]float64, turns*ditherLanes+1), make([]float64, turns*ditherLanes+1)
			a.draw(got[1:])
			b.drawGeneric(want[1:])
			if !slices.Equal(got, want) || *a != *b {
				t.Fatalf("%d turns: %v, want %v", turns, got, want)
			}
		}
	})
}

// TestInterleave: every sample lands in its place, and back in the place it came
// from.
func TestInterleave(t *testing.T) {
	const from = 3
	vectortest.Each(t, func(t *testing.T) {
		for channels := 1; channels <= 5; channels++ {
			for frames := 1; frames <= longest; frames++ {
				x, back := make([][]float64, channels), make([][]float64, channels)
				for c := range x {
					x[c] = noise(from+longest+c, 1+float64(c)) // longer than what is taken
					back[c] = slices.Clone(x[c])
					clear(back[c][from:][:frames])
				}
				got := make([]float64, channels*frames)
				Interleave(got, x, from)
				for i, v := range got {
					if want := x[i%channels][from+i/channels]; v != want {
						t.Fatalf("%d channels, sample %d: %v, want %v", channels, i, v, want)
					}
				}
				Separate(back, from, got)
				for c := range x {
					if !slices.Equal(back[c], x[c]) {
						t.Fatalf("%d channels, %d frames: channel %d came back as %v, want %v", channels, frames, c, back[c], x[c])
					}
				}
			}
		}
	})
}

// TestStaysInside: whatever is read or written lies within the slices, at their
// ends and at their beginnings.
func TestStaysInside(t *testing.T) {
	vectortest.Each(t, func(t *testing.T) {
		for _, e := range encodings() {
			for _, front := range []bool{false, true} {
				stayInside(t, e, front)
			}
		}
	})
}

func stayInside(t *testing.T, e Encoding, front bool) {
	values, written := asmtest.Fenced[float64](longest, front), asmtest.Fenced[float64](longest, front)
	noise, bytes := asmtest.Fenced[float64](longest, front), asmtest.Fenced[byte](longest*e.Bytes, front)
	copy(values, someNoise)
	for n := range longest + 1 {
		first, end := longest-n, longest // a fence is behind
		if front {
			first, end = 0, n
		}
		q := mustQuantiser(t, e, 1, nil)
		q.noise = noise[first:end]
		b := bytes[first*e.Bytes : end*e.Bytes]
		q.encodeBlock(b, values[first:end])
		Decode(written[first:end], b, e)
		for i, v := range written[first:end] {
			// Half an LSB; 32-bit float is off by 2^-25 at the most.
			if want := values[first+i]; !(math.Abs(v-want) <= max(math.Ldexp(0.5, 1-e.Bits), 0x1p-25)) {
				t.Fatalf("%v, %d samples: %v became %v", e, n, want, v)
			}
		}
		if i := FirstNonFinite(values[first:end]); i >= 0 {
			t.Fatalf("sample %d of %d is not finite", i, n)
		}
		if turns := n / ditherLanes * ditherLanes; front {
			NewDither([32]byte{}, "", 0).draw(written[:turns])
		} else {
			NewDither([32]byte{}, "", 0).draw(written[longest-turns:])
		}
		if n > 0 && n%2 == 0 {
			half := [][]float64{values[first : first+n/2], values[end-n/2 : end]}
			Interleave(written[first:end], half, 0)
			Separate(half, 0, written[first:end])
		}
	}
}

var someNoise = noise(longest, 0.9)

// TestFirstNonFiniteEverywhere: at every place, with every vector in use.
func TestFirstNonFiniteEverywhere(t *testing.T) {
	vectortest.Each(t, func(t *testing.T) {
		for _, v := range []float64{math.NaN(), math.Inf(1), math.Inf(-1), math.Float64frombits(0x7ff0_0000_0000_0001)} {
			for at := range longest {
				x := slices.Repeat([]float64{math.MaxFloat64}, longest)
				x[at] = v
				if i := FirstNonFinite(x); i != at {
					t.Fatalf("%v at %d: found at %d", v, at, i)
				}
			}
		}
	})
}

// TestNoGarbage: once made, nothing is allocated, however the calls are split.
func TestNoGarbage(t *testing.T) {
	const channels, frames = 2, 3001
	vectortest.Each(t, func(t *testing.T) {
		for _, e := range encodings() {
			q := mustQuantiser(t, e, channels, ditherFor(e, channels))
			x, b := noise(channels*frames, 0.999), make([]byte, channels*frames*e.Bytes)
			if n := testing.AllocsPerRun(10, func() {
				if err := q.Encode(b, x); err != nil {
					t.Error(err)
				}
				if err := q.Encode(b[:channels*e.Bytes], x[:channels]); err != nil {
					t.Error(err)
				}
				Decode(x, b, e)
				if FirstNonFinite(x) >= 0 {
					t.Error("not finite")
				}
			}); n != 0 {
				t.Errorf("%v: %v allocations a run, want none", e, n)
			}
		}
	})
}

func TestFloat64sOfAnyBits(t *testing.T) {
	vectortest.Each(t, func(t *testing.T) {
		e := Encoding{Float: true, Bytes: 8, Bits: 64}
		r := rand.New(rand.NewPCG(31, 32))
		for n := range longest {
			in := make([]byte, 8*n)
			for i := range n {
				v := r.Uint64()
				if f := math.Float64frombits(v); f-f != 0 {
					v = 0
				}
				binary.LittleEndian.PutUint64(in[8*i:], v)
			}
			if got := fmt.Sprintf("%x", encode(t, e, decode(e, in))); got != fmt.Sprintf("%x", in) {
				t.Fatalf("%d samples have changed", n)
			}
		}
	})
}
