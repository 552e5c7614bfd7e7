package lanes

import (
	"fmt"
	"strings"
	"testing"

	"fettle/filter/stream/machine"
)

func TestPlan(t *testing.T) {
	atEachKernel(t, func(t *testing.T, k machine.Kernel) {
		p := New([]float64{1}, 512, k)
		if p.Kernel() != k || p.Size() != 512 {
			t.Errorf("a plan of 512 points for %v has kernel %v and size %d", k, p.Kernel(), p.Size())
		}
	})
}

func TestMisuse(t *testing.T) {
	p := New([]float64{1}, 256, machine.Portable)
	x, short := make([]float64, 256), make([]float64, 255)
	for _, c := range []struct {
		name, want string
		do         func()
	}{
		{"no taps", "0 taps", func() { New(nil, 256, machine.Portable) }},
		{"too many taps", "257 taps", func() { New(make([]float64, 257), 256, machine.Portable) }},
		{"small block", "128 points", func() { New([]float64{1}, 128, machine.Portable) }},
		{"large block", "33554432 points", func() { New([]float64{1}, 1<<25, machine.Portable) }},
		{"odd block", "768 points", func() { New([]float64{1}, 768, machine.Portable) }},
		{"no kernel", "Kernel(7)", func() { New([]float64{1}, 256, 7) }},
		{"negative kernel", "Kernel(-1)", func() { New([]float64{1}, 256, -1) }},
		{"short output", "255 samples", func() { p.Convolve(short, x, x, x, p.Scratch()) }},
		{"short input", "255 samples", func() { p.Convolve(x, x, x, short, p.Scratch()) }},
	} {
		wantPanic(t, c.name, c.want, c.do)
	}
	for _, k := range []machine.Kernel{machine.Portable, machine.AVX2, machine.AVX512} {
		if !k.Runs() {
			wantPanic(t, k.String(), "does not run", func() { New([]float64{1}, 256, k) })
		}
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
