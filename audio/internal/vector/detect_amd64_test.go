//go:build !purego

package vector

import (
	"testing"

	"fettle/audio/needs"
)

// TestVectorsRun: where assembly is built, its tests leave out what the processor lacks.
func TestVectorsRun(t *testing.T) {
	if !AVX2.Available() {
		needs.Missing(t, "missing: a processor with AVX2, to test assembly on")
	}
}
