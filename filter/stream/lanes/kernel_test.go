package lanes

import (
	"fmt"
	"runtime"
	"slices"
	"strings"
	"testing"
)

func TestKernelNames(t *testing.T) {
	for _, k := range Available() {
		got, err := ParseKernel(k.String())
		if err != nil || got != k {
			t.Errorf("ParseKernel(%q) = %v, %v", k, got, err)
		}
	}
	if s := Kernel(9).String(); s != "Kernel(9)" {
		t.Errorf("Kernel(9) is called %q", s)
	}
}

func TestUnknownKernel(t *testing.T) {
	for _, name := range []string{"", "AVX2", "sse2"} {
		_, err := ParseKernel(name)
		if err == nil || !strings.Contains(err.Error(), fmt.Sprintf("%q", name)) || !strings.Contains(err.Error(), "portable") {
			t.Errorf("ParseKernel(%q): %v; want the name and what to take", name, err)
		}
	}
}

// TestUnavailableKernels are known by name, and neither parsed nor planned for.
func TestUnavailableKernels(t *testing.T) {
	for _, k := range []Kernel{Portable, AVX2, AVX512} {
		if k.available() {
			continue
		}
		_, err := ParseKernel(k.String())
		if err == nil || !strings.Contains(err.Error(), "cannot run here") {
			t.Errorf("ParseKernel(%q): %v", k, err)
		}
		wantPanic(t, "kernel "+k.String(), "not available", func() { New([]float64{1}, 64, k) })
	}
}

func TestAvailable(t *testing.T) {
	all := Available()
	if all[0] != Portable || !slices.IsSorted(all) {
		t.Errorf("Available() = %v: want portable first and ascending", all)
	}
	if Best() != all[len(all)-1] {
		t.Errorf("Best() = %v of %v", Best(), all)
	}
	if runtime.GOARCH != "amd64" && len(all) > 1 {
		t.Errorf("Available() = %v on %s", all, runtime.GOARCH)
	}
}

func TestLanes(t *testing.T) {
	for k, want := range map[Kernel]int{Portable: 4, AVX2: 4, AVX512: 8} {
		if k.Lanes() != want {
			t.Errorf("%v has %d lanes, want %d", k, k.Lanes(), want)
		}
	}
	p := New([]float64{1}, 64, Best())
	if p.Kernel() != Best() || p.Lanes() != Best().Lanes() || p.Size() != 64 || len(p.Buffer()) != 2*64*p.Lanes() {
		t.Errorf("a plan of 64 points has kernel %v, %d lanes, size %d, buffer %d", p.Kernel(), p.Lanes(), p.Size(), len(p.Buffer()))
	}
}

func TestMisuse(t *testing.T) {
	p := New([]float64{1}, 64, Portable)
	short := planes(8, 64)
	short[3] = short[3][:63]
	for _, c := range []struct {
		name, want string
		do         func()
	}{
		{"no taps", "0 taps", func() { New(nil, 64, Portable) }},
		{"too many taps", "65 taps", func() { New(make([]float64, 65), 64, Portable) }},
		{"small block", "16 points", func() { New([]float64{1}, 16, Portable) }},
		{"large block", "33554432 points", func() { New([]float64{1}, 1<<25, Portable) }},
		{"odd block", "96 points", func() { New([]float64{1}, 96, Portable) }},
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
