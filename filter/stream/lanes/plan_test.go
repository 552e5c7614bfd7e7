package lanes

import (
	"fmt"
	"strings"
	"testing"

	"fettle/filter/stream/machine"
)

func TestLanes(t *testing.T) {
	for k, want := range map[machine.Kernel]int{machine.Portable: 4, machine.AVX2: 4, machine.AVX512: 8} {
		if Of(k) != want {
			t.Errorf("%v has %d lanes, want %d", k, Of(k), want)
		}
	}
	best := machine.Best()
	p := New([]float64{1}, 64, best)
	if p.Kernel() != best || p.Lanes() != Of(best) || p.Size() != 64 || len(p.Buffer()) != 2*64*p.Lanes() {
		t.Errorf("a plan of 64 points has kernel %v, %d lanes, size %d, buffer %d", p.Kernel(), p.Lanes(), p.Size(), len(p.Buffer()))
	}
}

func TestMisuse(t *testing.T) {
	p := New([]float64{1}, 64, machine.Portable)
	short := planes(8, 64)
	short[3] = short[3][:63]
	for _, c := range []struct {
		name, want string
		do         func()
	}{
		{"no taps", "0 taps", func() { New(nil, 64, machine.Portable) }},
		{"too many taps", "65 taps", func() { New(make([]float64, 65), 64, machine.Portable) }},
		{"small block", "16 points", func() { New([]float64{1}, 16, machine.Portable) }},
		{"large block", "33554432 points", func() { New([]float64{1}, 1<<25, machine.Portable) }},
		{"odd block", "96 points", func() { New([]float64{1}, 96, machine.Portable) }},
		{"no kernel", "Kernel(7)", func() { New([]float64{1}, 64, 7) }},
		{"negative kernel", "Kernel(-1)", func() { New([]float64{1}, 64, -1) }},
		{"short buffer", "511 values", func() { p.Convolve(make([]float64, 511)) }},
		{"load short buffer", "Load with 511 values", func() { p.Load(make([]float64, 511), planes(8, 64)) }},
		{"load few signals", "7 signals", func() { p.Load(p.Buffer(), planes(7, 64)) }},
		{"load short signal", "63 samples in signal 3", func() { p.Load(p.Buffer(), short) }},
		{"store few signals", "7 signals", func() { p.Store(planes(7, 64), p.Buffer()) }},
		{"store short signal", "63 samples to store in signal 3", func() { p.Store(short, p.Buffer()) }},
		{"store long signals", "65 samples to store in signal 0", func() { p.Store(planes(8, 65), p.Buffer()) }},
	} {
		wantPanic(t, c.name, c.want, c.do)
	}
}

func wantPanic(t *testing.T, name, want string, do func()) {
	t.Helper()
	defer func() {
		if got := fmt.Sprint(recover()); !strings.HasPrefix(got, "lanes: ") || !strings.Contains(got, want) {
			t.Errorf("%s: panic %q, want it to name %q", name, got, want)
		}
	}()
	do()
}
