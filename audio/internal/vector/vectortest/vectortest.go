// Package vectortest runs tests with each set of vector instructions.
package vectortest

import (
	"testing"

	"fettle/audio/internal/vector"
)

// Each runs f as a test with each set that there is, plain Go first. Missing ones are
// left out; a test of package vector says so.
func Each(t *testing.T, f func(t *testing.T)) {
	t.Helper()
	for _, s := range vector.All() {
		if !s.Available() {
			continue
		}
		t.Run(s.String(), func(t *testing.T) {
			defer vector.Use(s)()
			f(t)
		})
	}
}

// EachBenchmark is Each for benchmarks; missing ones are left out.
func EachBenchmark(b *testing.B, f func(b *testing.B)) {
	b.Helper()
	for _, s := range vector.All() {
		if !s.Available() {
			continue
		}
		b.Run(s.String(), func(b *testing.B) {
			defer vector.Use(s)()
			f(b)
		})
	}
}
