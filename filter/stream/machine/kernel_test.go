package machine

import (
	"fmt"
	"runtime"
	"slices"
	"strings"
	"testing"
)

func TestNames(t *testing.T) {
	for _, k := range Available() {
		got, err := Parse(k.String())
		if err != nil || got != k {
			t.Errorf("Parse(%q) = %v, %v", k, got, err)
		}
	}
	if s := Kernel(9).String(); s != "Kernel(9)" {
		t.Errorf("Kernel(9) is called %q", s)
	}
}

func TestUnknown(t *testing.T) {
	for _, name := range []string{"", "AVX2", "sse2"} {
		_, err := Parse(name)
		if err == nil || !strings.Contains(err.Error(), fmt.Sprintf("%q", name)) || !strings.Contains(err.Error(), "portable") {
			t.Errorf("Parse(%q): %v; want the name and what to take", name, err)
		}
	}
	for _, k := range []Kernel{-1, 7} {
		if k.Runs() {
			t.Errorf("%v runs", k)
		}
	}
}

// TestUnavailable are known by name and not parsed.
func TestUnavailable(t *testing.T) {
	for _, k := range []Kernel{Portable, AVX2, AVX512} {
		_, err := Parse(k.String())
		if k.Runs() != (err == nil) {
			t.Errorf("%v runs: %v, but Parse says %v", k, k.Runs(), err)
		}
		if err != nil && !strings.Contains(err.Error(), "cannot run here") {
			t.Errorf("Parse(%q): %v", k, err)
		}
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
