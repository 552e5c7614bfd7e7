package lanes

import (
	"testing"

	"fettle/audio/asmtest"
)

func TestAssemblyIsCurrent(t *testing.T) {
	asmtest.Current(t, "_asm", ".", "-out", "../passes_amd64.s", "-stubs", "../passes_amd64.go", "-pkg", "lanes")
}

func TestPuregoHasNoAssembly(t *testing.T) { asmtest.WithoutAssembly(t, "passes_amd64.s") }
