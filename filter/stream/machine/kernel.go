// Package machine says which of the arithmetic kernels this processor can run.
//
// A kernel is one way to compute the same sums: plain Go, or assembly for a set of
// vector instructions. Results of two kernels differ by rounding; one kernel
// gives the same bits on every machine that has it. So a treatment record names
// its kernel, and nothing ever changes kernels on its own.
package machine

import (
	"fmt"
	"strings"
)

// Kernel is one way to compute.
type Kernel int

const (
	// Portable is plain Go, on every machine.
	Portable Kernel = iota
	// AVX2 needs an amd64 processor with AVX2 and FMA.
	AVX2
	// AVX512 needs an amd64 processor with AVX-512 Foundation, AVX2 and FMA.
	AVX512
)

// kernels has a row for each kernel, slowest first.
var kernels = [...]struct{ name, needs string }{
	Portable: {"portable", "nothing"},
	AVX2:     {"avx2", "AVX2 and FMA"},
	AVX512:   {"avx512", "AVX-512 Foundation, AVX2 and FMA"},
}

// String returns the name that Parse takes.
func (k Kernel) String() string {
	if !k.known() {
		return fmt.Sprintf("Kernel(%d)", int(k))
	}
	return kernels[k].name
}

// Runs says whether this build has the kernel and this processor can run it.
func (k Kernel) Runs() bool { return k.known() && k.available() }

func (k Kernel) known() bool { return k >= 0 && int(k) < len(kernels) }

// Available returns the kernels that run here, slowest first. Portable is
// always the first.
func Available() []Kernel {
	var all []Kernel
	for i := range kernels {
		if Kernel(i).available() {
			all = append(all, Kernel(i))
		}
	}
	return all
}

// Best returns the fastest kernel that runs here.
func Best() Kernel {
	all := Available()
	return all[len(all)-1]
}

// Parse returns the kernel of that name: portable, avx2 or avx512. It is an
// error if there is none, or if it cannot run here.
func Parse(name string) (Kernel, error) {
	for i, row := range kernels {
		k := Kernel(i)
		if row.name != name {
			continue
		}
		if !k.available() {
			return 0, fmt.Errorf("kernel %q cannot run here: it needs %s and a build for amd64 without the tag purego; take one of %s", name, row.needs, Names())
		}
		return k, nil
	}
	return 0, fmt.Errorf("no kernel is called %q; take one of %s", name, Names())
}

// Names lists the kernels that run here, slowest first.
func Names() string {
	var s []string
	for _, k := range Available() {
		s = append(s, k.String())
	}
	return strings.Join(s, ", ")
}
