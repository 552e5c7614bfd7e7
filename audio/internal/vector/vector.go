// Package vector says which assembly package audio and those below it run. All of
// it gives the same bits as plain Go.
package vector

import "fmt"

// Set is a set of vector instructions; each includes those before it.
type Set int

const (
	// None is plain Go, on every machine.
	None Set = iota
	// AVX2 needs an amd64 processor that has it.
	AVX2
	// AVX512 needs an amd64 processor with AVX-512 Foundation.
	AVX512
)

var names = [...]string{None: "portable", AVX2: "avx2", AVX512: "avx512"}

// All lists the sets, smallest first.
func All() []Set { return []Set{None, AVX2, AVX512} }

func (s Set) String() string {
	if s < 0 || int(s) >= len(names) {
		return fmt.Sprintf("Set(%d)", int(s))
	}
	return names[s]
}

// best is what this processor and this build have.
var best = detect()

var used = best

// Used returns the set in use: the largest that there is, but in tests.
func Used() Set { return used }

// Available tells whether this processor and this build have the set.
func (s Set) Available() bool { return s <= best }

// Use is for tests: it makes s the set in use, until restore is called. It panics
// if s is not available. Nothing else may run meanwhile.
func Use(s Set) (restore func()) {
	if !s.Available() {
		panic(fmt.Sprintf("vector: %v is not available", s))
	}
	before := used
	used = s
	return func() { used = before }
}
