package lanes

import (
	"fmt"
	"strings"
)

// Kernel is one way to compute the passes. All kernels give the same result
// up to rounding, each one always the same to the bit.
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
var kernels = [...]struct {
	name  string
	lanes int
	needs string
}{
	Portable: {"portable", 4, "nothing"},
	AVX2:     {"avx2", 4, "AVX2 and FMA"},
	AVX512:   {"avx512", 8, "AVX-512 Foundation, AVX2 and FMA"},
}

// String returns the name that ParseKernel takes.
func (k Kernel) String() string {
	if !k.known() {
		return fmt.Sprintf("Kernel(%d)", int(k))
	}
	return kernels[k].name
}

// Lanes returns how many blocks go side by side: 4 or 8. It panics if k is
// none of the constants.
func (k Kernel) Lanes() int { return kernels[k].lanes }

func (k Kernel) known() bool { return k >= 0 && int(k) < len(kernels) }

// Available returns the kernels that this build has and this processor can
// run, slowest first. Portable is always the first.
func Available() []Kernel {
	var all []Kernel
	for i := range kernels {
		if Kernel(i).available() {
			all = append(all, Kernel(i))
		}
	}
	return all
}

// Best returns the fastest kernel that is available.
func Best() Kernel {
	all := Available()
	return all[len(all)-1]
}

// ParseKernel returns the kernel of that name: portable, avx2 or avx512. It is
// an error if there is none, or if it cannot run here.
func ParseKernel(name string) (Kernel, error) {
	for i, row := range kernels {
		k := Kernel(i)
		if row.name != name {
			continue
		}
		if !k.available() {
			return 0, fmt.Errorf("kernel %q cannot run here: it needs %s and a build for amd64 without the tag purego; take one of %s", name, row.needs, names(Available()))
		}
		return k, nil
	}
	return 0, fmt.Errorf("no kernel is called %q; take one of %s", name, names(Available()))
}

func names(all []Kernel) string {
	var s []string
	for _, k := range all {
		s = append(s, k.String())
	}
	return strings.Join(s, ", ")
}
